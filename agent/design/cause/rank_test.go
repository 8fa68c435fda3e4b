package cause

import (
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// circuit is a heating circuit of 2 kg/s at 80/60 °C by design, 167.2 kW, whose duty is
// compared with a fixed one.
func circuit(flow, inlet, outlet float64) Evidence {
	const u, uf = 0.1, 0.01
	Q, rise := flow*cp*(inlet-outlet), cp*(inlet-outlet)
	own := func(by float64) Effect { return Effect{Deviation: by, Duty: by} }
	uQ := math.Hypot(rise*uf, flow*cp*u*math.Sqrt2)
	return Evidence{
		Subject: "circuit", Deviation: Estimate{true, Q - 167200, uQ}, Allowance: 8000,
		Flow:   Operating{Known: true, Tag: "FT", Value: flow, Design: 2, Uncertainty: uf, ByChange: rise, Error: own(rise)},
		Inlet:  Operating{Known: true, Tag: "T1", Value: inlet, Design: 353.15, Uncertainty: u, ByChange: flow * cp, Error: own(flow * cp)},
		Outlet: Operating{Known: true, Tag: "T2", Value: outlet, Design: 333.15, Uncertainty: u, ByChange: -flow * cp, Error: own(-flow * cp)},
	}
}

// Each cause from evidence built by hand. The figures are worked beside each.
func TestRank(t *testing.T) {
	for _, tt := range []struct {
		name   string
		change func(*Evidence)
		e      Evidence
		first  Kind
		tag    string
		weight float64 // at least
		alike  []Kind
		says   string
	}{
		// 1.6·4180·20 = 133.76 kW, 33.44 short, of which 83.6 kW/(kg/s)·(−0.4) = all.
		{"low flow", nil, circuit(1.6, 353.15, 333.15), FlowAway, "FT", 0.99, []Kind{FlowMeter}, "flow is 20 % below design and explains 100 % of the deviation"},
		{"low flow, witness agrees", func(e *Evidence) { e.Witness = Estimate{true, 100, 2000} }, circuit(1.6, 353.15, 333.15), FlowAway, "FT", 0.99, nil, ""},
		{"cold inlet", nil, circuit(2, 349.15, 333.15), InletAway, "T1", 0.99, []Kind{InletSensor}, "inlet is 4 K below design"},
		// ln(3/2) = 0.405, ln(20/13.5) = 0.393
		{"low difference", nil, circuit(3, 353.15, 339.65), LowDifference, "circuit", 0.95, nil, "flow is 50 % above design while the temperature difference is 32 % below"},
		{"no flow", func(e *Evidence) { e.Deviation = Estimate{} }, circuit(0, 353.15, 333.15), FlowAway, "FT", 1, []Kind{FlowMeter}, "flow is 100 % below design"},
		{"unsteady", func(e *Evidence) {
			e.Steadiness = Steadiness{Known: true, Worst: "inlet", Change: 9000, Limit: 2000, Stands: 8, R: 5, RLimit: 2.5}
		}, circuit(1.6, 353.15, 333.15), Unsteady, "circuit", 1, nil, "the inlet was not steady"},
		{"wrong order", func(e *Evidence) { e.Marks = []Mark{{Tag: "T2", Order: true}, {Tag: "T1", Order: true}} }, circuit(2, 333.15, 353.15), Swapped, "circuit", 1, nil, "T1 and T2 are in the wrong order"},
		{"doubted", func(e *Evidence) { e.Marks = []Mark{{Tag: "T2", Reason: "stuck"}} }, circuit(2, 353.15, 333.15), OutletSensor, "T2", 0.5, nil, "the outlet sensor: stuck"},
		{"disagrees", func(e *Evidence) { e.Marks = []Mark{{Tag: "FT", Tested: true, Reason: "not-zero"}} }, circuit(2, 353.15, 333.15), FlowMeter, "FT", 0.95, nil, "the flow meter: not-zero"},
		// The outlet reads 2 K too high beside its twin: 2·4180·2 = 16.72 kW, the whole deviation.
		// Nothing tells which of the two is wrong but that the twin moves no duty.
		{"pair", func(e *Evidence) { e.Tests = []Test{{"redundant sensor", "T2", "T2b", Estimate{true, 2, 0.15}}} }, circuit(2, 353.15, 335.15), OutletSensor, "T2", 0.99, []Kind{OutletSensor}, "the outlet sensor reads 2 K too high, which explains 100 % of the deviation"},
		{"zero test of a pair", func(e *Evidence) { e.Tests = []Test{{"zero test", "T1", "T2", Estimate{true, -2, 0.15}}} }, circuit(2, 351.15, 333.15), InletSensor, "T1", 0.99, []Kind{OutletSensor}, "the inlet sensor reads 2 K too low"},
		{"zero flow", func(e *Evidence) { e.Tests = []Test{{"zero test", "FT", "", Estimate{true, 0.2, 0.01}}} }, circuit(2.2, 353.15, 333.15), FlowMeter, "FT", 0.99, nil, "the flow meter reads 0.2 kg/s too high"},
		{"boiling", func(e *Evidence) { e.Margins = []Margin{{NearBoiling, "T1", Estimate{true, -1, 0.5}}} }, circuit(2, 353.15, 333.15), NearBoiling, "T1", 0.97, nil, "the fluid is -1 K from its boiling point"},
		{"dew point", func(e *Evidence) { e.Margins = []Margin{{Kind: NearDewPoint, Tag: "T1"}} }, circuit(2, 353.15, 333.15), NearDewPoint, "T1", 0.25, nil, ""},
		{"freezing", func(e *Evidence) { e.Margins = []Margin{{NearFreezing, "T1", Estimate{true, 1, 0.5}}} }, circuit(2, 353.15, 333.15), NearFreezing, "T1", 0.25, nil, ""},
		{"expectation", func(e *Evidence) {
			e.Deviation = Estimate{true, -2000, 6000}
			e.Shares = []Share{{"outdoor temperature", true, 0.7}, {"FT", false, 0.3}}
		}, circuit(2, 353.15, 333.15), ExpectationUnsure, "outdoor temperature", 0.5, nil, "70 % comes from what is expected, most of it from outdoor temperature"},
		{"instruments", func(e *Evidence) {
			e.Deviation = Estimate{true, -2000, 6000}
			e.Shares = []Share{{"T1", false, 0.2}, {"FT", false, 0.6}}
		}, circuit(2, 353.15, 333.15), InstrumentsUnsure, "FT", 0.5, nil, "most of it from FT"},
		{"nothing", nil, circuit(2, 353.15, 337.15), ExpectationUnsure, "circuit", 0.05, nil, "nothing that is measured explains"},
	} {
		if tt.change != nil {
			tt.change(&tt.e)
		}
		causes := Rank(tt.e)
		if len(causes) == 0 {
			t.Errorf("%s: no cause", tt.name)
			continue
		}
		c := causes[0]
		if c.Kind != tt.first || c.Subject != tt.tag || !(c.Weight >= tt.weight) || !slices.Equal(c.Alike, tt.alike) || !strings.Contains(c.Says, tt.says) {
			t.Errorf("%s: %+v\nwant %s of %s, alike %v, %q", tt.name, causes, tt.first, tt.tag, tt.alike, tt.says)
		}
	}
}

// A load that does what its design says has nothing to look at.
func TestNothingAmiss(t *testing.T) {
	if causes := Rank(circuit(2, 353.15, 333.15)); len(causes) > 0 {
		t.Errorf("%+v", causes)
	}
	if causes := Rank(Evidence{}); len(causes) > 0 {
		t.Errorf("of no evidence: %+v", causes)
	}
}

// Where the expectation follows the flow, the flow explains nothing.
func TestFollowedIsNoCause(t *testing.T) {
	e := circuit(1.6, 353.15, 333.15)
	e.Flow.Follows, e.Flow.ByChange = true, 0
	for _, c := range Rank(e) {
		if c.Kind == FlowAway {
			t.Errorf("%+v", c)
		}
	}
}

// A flow meter that reads 20 % low shows in the witness. It is the meter and not the flow,
// although both would explain the deviation as well.
func TestWitnessBlamesMeter(t *testing.T) {
	e := circuit(1.6, 353.15, 333.15)
	e.Witness = Estimate{true, e.Deviation.Value, 2000}
	e.Tests = []Test{{"redundant sensor", "T1", "T1b", Estimate{true, 0.01, 0.2}}, {"redundant sensor", "T2", "T2b", Estimate{true, 0.02, 0.2}}}
	causes := Rank(e)
	if len(causes) != 1 || causes[0].Kind != FlowMeter || causes[0].Weight < 0.99 || len(causes[0].Alike) > 0 {
		t.Errorf("%+v", causes)
	}
	e.Tests = nil
	causes = Rank(e) // nothing clears the thermometers
	if len(causes) != 3 || !slices.Equal(causes[0].Alike, []Kind{InletSensor, OutletSensor}) {
		t.Errorf("without pairs: %+v", causes)
	}
}

// arbitrary draws evidence, in which some figures are no numbers.
func arbitrary(t *rapid.T) Evidence {
	x := func(what string) float64 {
		return rapid.OneOf(
			rapid.Float64Range(-1e3, 1e3), rapid.Float64(), rapid.SampledFrom([]float64{0, math.NaN(), math.Inf(1), math.Inf(-1), 1e-300, 1e300}),
		).Draw(t, what)
	}
	estimate := func(what string) Estimate {
		return Estimate{rapid.Bool().Draw(t, what), x(what), x(what)}
	}
	operating := func(tag string) Operating {
		return Operating{
			rapid.Bool().Draw(t, tag), tag, x(tag), x(tag), x(tag), x(tag), x(tag), rapid.Bool().Draw(t, tag),
			Effect{x(tag), x(tag), x(tag), x(tag)},
		}
	}
	e := Evidence{
		Subject: "s", Deviation: estimate("deviation"), Allowance: x("allowance"),
		Flow: operating("a"), Inlet: operating("b"), Outlet: operating("c"),
		OtherFlow: operating("d"), OtherInlet: operating("e"), OtherOutlet: operating("f"),
		Steadiness: Steadiness{rapid.Bool().Draw(t, "known"), rapid.Bool().Draw(t, "steady"), "inlet", x("change"), x("limit"), x("stands"), x("R"), x("limit")},
		Witness:    estimate("witness"),
		Exchanger: Exchanger{
			"x", estimate("closure"), estimate("conductance"), estimate("shift"), estimate("shift"), rapid.Bool().Draw(t, "ill"),
			x("effectiveness"), x("limit"), x("by"), estimate("fouling"), estimate("trend"), nil, rapid.Int64Range(0, 50).Draw(t, "since"), rapid.Bool().Draw(t, "signalled"),
		},
	}
	tags := rapid.SampledFrom([]string{"", "a", "b", "c", "d", "e", "f", "g"})
	for range rapid.IntRange(0, 4).Draw(t, "tests") {
		e.Tests = append(e.Tests, Test{"test", tags.Draw(t, "tag"), tags.Draw(t, "against"), estimate("test")})
		e.Marks = append(e.Marks, Mark{tags.Draw(t, "tag"), rapid.Bool().Draw(t, "order"), rapid.Bool().Draw(t, "tested"), "doubted"})
		e.Margins = append(e.Margins, Margin{rapid.SampledFrom(Kinds()).Draw(t, "kind"), tags.Draw(t, "tag"), estimate("margin")})
		e.Shares = append(e.Shares, Share{tags.Draw(t, "of"), rapid.Bool().Draw(t, "expected"), x("share")})
		e.Exchanger.Days = append(e.Exchanger.Days, Day{rapid.Int64Range(0, 50).Draw(t, "day"), estimate("day"), estimate("day")})
	}
	return e
}

// Whatever the evidence: weights lie in 0 to 1 and fall, all figures are numbers, kinds are
// known, each has a line, and neither doing it again nor another order of the lists changes
// anything.
func TestRankProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		e := arbitrary(t)
		causes := Rank(e)
		for i, c := range causes {
			if !(c.Weight >= 0 && c.Weight <= 1) || i > 0 && c.Weight > causes[i-1].Weight {
				t.Fatalf("weight %g after %+v", c.Weight, causes[:i])
			}
			if c.Says == "" || strings.Contains(c.Says, "NaN") || strings.Contains(c.Says, "Inf") || strings.HasSuffix(c.Says, ".") {
				t.Fatalf("says %q", c.Says)
			}
			for _, k := range append(c.Alike, c.Kind) {
				if !slices.Contains(Kinds(), k) {
					t.Fatalf("kind %q", k)
				}
			}
			for _, f := range c.Figures {
				if !finite(f.Value, f.Stands) || f.Name == "" || f.Unit == "" {
					t.Fatalf("%s: figure %+v", c.Kind, f)
				}
			}
		}
		again := e
		again.Tests, again.Marks = slices.Clone(e.Tests), slices.Clone(e.Marks)
		again.Margins, again.Shares = slices.Clone(e.Margins), slices.Clone(e.Shares)
		slices.Reverse(again.Tests)
		slices.Reverse(again.Marks)
		slices.Reverse(again.Margins)
		slices.Reverse(again.Shares)
		if other := Rank(again); !reflect.DeepEqual(causes, other) {
			t.Fatalf("in another order:\n%+v\n%+v", causes, other)
		}
	})
}
