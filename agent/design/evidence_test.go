package design

import (
	"math"
	"testing"
	"time"

	"heatreeve/agent/design/cause"
	"heatreeve/agent/design/expect"
)

// A heating circuit of 2 kg/s from 80 to 60 °C with 4.18 kJ/(kg K): 167.2 kW.
var circuit = Target{
	Name: "circuit", Expect: expect.Fixed{Duty: 167.2e3}, Allow: 0.05, Lasting: 5 * time.Minute,
	Point: Point{2, 353.15, 333.15}, Tags: Tags{"FT", "T1", "T2"}, WitnessError: 0.01,
}

// runs is a minute of the circuit at a point, with a witness that counts part of what it moves.
func runs(start int64, at Point, part float64) Minute {
	Q := at.Flow * 4180 * (at.Inlet - at.Outlet)
	return Minute{
		Start: start, Whole: at.Flow > 0, Idle: at.Flow == 0, Duty: Q, Uncertainty: 0.01 * math.Abs(Q), Random: 1e4,
		Flow: at.Flow, Inlet: at.Inlet, Outlet: at.Outlet, FlowError: 0.01, InletError: 0.05, OutletError: 0.05,
		Served: 60 * Q, Counted: part * 60 * Q,
	}
}

// What a judge of minutes tells is what the causes go by: the first of each, and of a
// warning's.
func TestEvidenceOfAJudge(t *testing.T) {
	for _, tt := range []struct {
		name    string
		at      Point
		part    float64
		first   cause.Kind
		subject string
		verdict Verdict
	}{
		{"low flow", Point{1.6, 353.15, 333.15}, 1, cause.FlowAway, "FT", Short},
		{"cold inlet", Point{2, 348.15, 333.15}, 1, cause.InletAway, "T1", Short},
		{"low difference", Point{3, 353.15, 340.15}, 1, cause.LowDifference, "circuit", Holding},
		{"swapped", Point{2, 333.15, 353.15}, 1, cause.Swapped, "circuit", Short},
		{"no flow", Point{0, 353.15, 333.15}, 1, cause.FlowAway, "FT", Undecided},
		{"meter reads low", Point{1.6, 353.15, 333.15}, 1.25, cause.FlowMeter, "FT", Short},
	} {
		j := NewJudge(circuit)
		for m := range int64(20) {
			observe(j, runs(m*nanosecondsPerMinute, tt.at, tt.part))
		}
		causes := cause.Rank(j.Evidence())
		if len(causes) == 0 || causes[0].Kind != tt.first || causes[0].Subject != tt.subject || j.Last != tt.verdict {
			t.Errorf("%s: %v, %+v", tt.name, j.Last, causes)
		}
		for _, w := range j.Standing {
			if len(w.Causes) == 0 || w.Causes[0].Kind != tt.first {
				t.Errorf("%s: warning %+v", tt.name, w)
			}
		}
	}
}

// A load at rest runs away from its design also where its exchanger tells what to expect.
func TestRestOfAnExchanger(t *testing.T) {
	of := circuit
	of.Expect, of.ByExchanger = nil, true
	j := NewJudge(of)
	observe(j, runs(0, Point{0, 353.15, 333.15}, 1))
	if causes := cause.Rank(j.Evidence()); len(causes) != 1 || causes[0].Kind != cause.FlowAway || causes[0].Weight < 0.99 {
		t.Errorf("%+v", causes)
	}
}

// By the slopes half way, flow, inlet and outlet together explain the whole of a deviation,
// however great: m·ΔT − m₀·ΔT₀ = (ΔT + ΔT₀)/2·Δm + (m + m₀)/2·Δ(ΔT).
func TestSharesAddUp(t *testing.T) {
	for _, at := range []Point{{1, 353.15, 333.15}, {1.3, 350.15, 341.15}, {3.1, 358.15, 320.15}, {2, 353.15, 330.15}} {
		j := NewJudge(circuit)
		for m := range int64(5) {
			observe(j, runs(m*nanosecondsPerMinute, at, 1))
		}
		e := j.Evidence()
		var sum float64
		for _, o := range []cause.Operating{e.Flow, e.Inlet, e.Outlet} {
			sum += o.ByChange * (o.Value - o.Design)
		}
		if d := e.Deviation.Value; !e.Deviation.Known || math.Abs(sum-d) > 1e-9*math.Abs(d) {
			t.Errorf("%+v: the shares add up to %g W of %g W", at, sum, d)
		}
	}
}

// A tag of which an uncertain reading was used is told, with the reason.
func TestDoubtedTagIsTold(t *testing.T) {
	j := NewJudge(circuit)
	for m := range int64(5) {
		x := runs(m*nanosecondsPerMinute, circuit.Point, 1)
		if m == 2 {
			x.Doubt = cause.Mark{Tag: "T2", Reason: "disagrees"}
		}
		observe(j, x)
	}
	causes := cause.Rank(j.Evidence())
	if len(causes) != 1 || causes[0].Kind != cause.OutletSensor || causes[0].Subject != "T2" || causes[0].Says != "the outlet sensor: disagrees" {
		t.Errorf("%+v", causes)
	}
}

// While the load is not steady, that comes first.
func TestUnsteadyComesFirst(t *testing.T) {
	j := NewJudge(circuit)
	for m := range int64(5) {
		observe(j, runs(m*nanosecondsPerMinute, Point{2, 343.15 + 3*float64(m), 333.15}, 1))
	}
	if causes := cause.Rank(j.Evidence()); len(causes) == 0 || causes[0].Kind != cause.Unsteady {
		t.Errorf("%+v", causes)
	}
}
