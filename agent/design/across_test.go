package design

import (
	"math"
	"slices"
	"testing"

	"heatreeve/agent/design/cause"
	"heatreeve/agent/design/exchanger"
)

// plates is the off-design example of the exchanger's own tests: films of 1/30 and 1/40 K/kW
// at 2 and 3 kg/s, wall 0.025 K/kW, exponents 0.8, cp 4.18 kJ/(kg K), in counterflow.
var plates = exchanger.Model{
	Arrangement: exchanger.Arrangement{Kind: exchanger.Counterflow},
	Hot:         exchanger.Film{Resistance: 1 / 30e3, Flow: 2, Exponent: 0.8},
	Cold:        exchanger.Film{Resistance: 1 / 40e3, Flow: 3, Exponent: 0.8},
	Wall:        0.025e-3,
}

// atPlates is the state that plates with an added resistance come to at 90 and 40 °C.
func atPlates(t *testing.T, Rf float64) exchanger.State {
	t.Helper()
	m := plates
	m.Wall += Rf
	s := exchanger.State{
		Hot:  exchanger.Stream{Flow: 2, Cp: 4180, Inlet: 363.15, FlowError: 0.006, InletError: 0.05, OutletError: 0.05},
		Cold: exchanger.Stream{Flow: 3, Cp: 4180, Inlet: 313.15, FlowError: 0.009, InletError: 0.05, OutletError: 0.05},
	}
	Q, err := m.Duty(&s)
	if err != nil {
		t.Fatal(err)
	}
	s.Hot.Outlet, s.Cold.Outlet = s.Hot.Inlet-Q/2/4180, s.Cold.Inlet+Q/3/4180
	return s
}

func sideOf(s *exchanger.Stream, flow, inlet, outlet string) cause.Evidence {
	point := func(tag string, x, u float64) cause.Operating {
		return cause.Operating{Known: true, Tag: tag, Value: x, Uncertainty: u, Scatter: u / 10, Follows: true}
	}
	return cause.Evidence{
		Subject: "load", Flow: point(flow, s.Flow, s.FlowError), Inlet: point(inlet, s.Inlet, s.InletError), Outlet: point(outlet, s.Outlet, s.OutletError),
	}
}

// told is what the two sides come to in a state whose statistics were before.
func told(s exchanger.State, before exchanger.Statistics, hot bool) cause.Evidence {
	a := Across{Model: &plates, State: s, Weight: 0.5, Hot: hot, Expects: true}
	t, slopes := plates.Tell(&s, 0.5, 0), plates.Slopes(&s, 0.5, 0)
	u := s.Errors(&slopes)
	x := cause.Exchanger{
		Name:             "plates",
		Closure:          cause.Estimate{Known: true, Value: t.Closure, Uncertainty: u.Closure},
		Conductance:      cause.Estimate{Known: true, Value: t.Ratio, Uncertainty: math.Hypot(u.Ratio, 0.02)},
		ClosureShift:     cause.Estimate{Known: true, Value: t.Closure - before.Closure, Uncertainty: u.Closure / 7},
		ConductanceShift: cause.Estimate{Known: true, Value: t.Ratio - before.Ratio, Uncertainty: u.Ratio / 7},
	}
	h, c := sideOf(&s.Hot, "FH", "TH1", "TH2"), sideOf(&s.Cold, "FC", "TC1", "TC2")
	own, other, beyond, off := h, c, t.HotBeyond, u.HotBeyond
	if !hot {
		own, other, beyond, off = c, h, t.ColdBeyond, u.ColdBeyond
	}
	own.Deviation, own.Allowance = cause.Estimate{Known: true, Value: beyond, Uncertainty: off}, 10e3
	return a.Evidence(own, other, x)
}

// From either side of an exchanger that tells what to expect: fouling explains the deviation
// of the duty whole, and each reading that is off comes first by its tag.
func TestCausesAcrossAnExchanger(t *testing.T) {
	clean := atPlates(t, 0)
	before := plates.Tell(&clean, 0.5, 0)
	for _, hot := range []bool{true, false} {
		causes := cause.Rank(told(atPlates(t, 0.02e-3), before, hot))
		if len(causes) == 0 || causes[0].Kind != cause.Fouling || causes[0].Subject != "plates" || causes[0].Weight < 0.9 || len(causes[0].Alike) > 0 {
			t.Errorf("hot %t, fouled: %+v", hot, causes)
		}
		for tag, spoil := range map[string]func(*exchanger.State){
			"FH": func(s *exchanger.State) { s.Hot.Flow *= 1.03 }, "FC": func(s *exchanger.State) { s.Cold.Flow *= 0.97 },
			"TH1": func(s *exchanger.State) { s.Hot.Inlet += 0.5 }, "TH2": func(s *exchanger.State) { s.Hot.Outlet -= 0.5 },
			"TC1": func(s *exchanger.State) { s.Cold.Inlet += 0.5 }, "TC2": func(s *exchanger.State) { s.Cold.Outlet -= 0.5 },
		} {
			s := clean
			spoil(&s)
			causes := cause.Rank(told(s, before, hot))
			if i := slices.IndexFunc(causes, func(c cause.Cause) bool { return c.Subject == tag }); i != 0 {
				t.Errorf("hot %t, %s is off and comes as %d of %+v", hot, tag, i, causes)
			}
		}
	}
}
