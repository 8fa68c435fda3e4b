package working

import (
	"math"
	"strings"
	"testing"

	"heatreeve/agent/design"
	"heatreeve/agent/design/exchanger"
	"heatreeve/agent/design/expect"
)

// The clean duty of an exchanger is worked from flows, films and inlets to what the model
// says; with 1 and 3 kg/s, 90 and 40 °C, these are 9.2561 kW/K, 0.83511 and 174.54 kW, which
// an independent programme worked for the same films.
func TestCleanDutyIsWorked(t *testing.T) {
	x := Exchanger{
		Name: "plates", Hot: true,
		Model: exchanger.Model{
			Hot:  exchanger.Film{Resistance: 1 / 30e3, Flow: 2, Exponent: 0.8},
			Cold: exchanger.Film{Resistance: 1 / 40e3, Flow: 3, Exponent: 0.8, PerKelvin: 0.01, Temperature: 320},
			Wall: 0.025e-3,
		},
		State: exchanger.State{
			Hot:  exchanger.Stream{Flow: 1, Cp: 4180, Inlet: 363.15, Outlet: 321.4},
			Cold: exchanger.Stream{Flow: 3, Cp: 4180, Inlet: 313.15, Outlet: 326.85},
		},
	}
	for _, tt := range []struct {
		arrangement exchanger.Kind
		loss        float64
		want        map[string]string // formulas
		UA, eps, Q  float64           // 0 where they are the model's alone
	}{
		{exchanger.Counterflow, 0, map[string]string{"C": "4.18 / 12.54", "Rh": "0.03333333333 / (1 / 2)^0.8", "Rc": "0.025 / (3 / 3)^0.8 / (1 + 0.01 × (320 − 320))"}, 9.2561, 0.83511, 174.54},
		{exchanger.Parallel, 2e3, map[string]string{"C": "4.18 / 12.54"}, 9.2561, 0, 0},
		{exchanger.Shells, 0, nil, 9.2561, 0, 0},
	} {
		x.Model.Kind, x.Loss = tt.arrangement, tt.loss
		clean, err := x.Model.Duty(&x.State)
		if err != nil {
			t.Fatal(err)
		}
		p := &page{
			Subject: &Subject{Exchanger: &x, Grounds: design.Grounds{Target: design.Target{ByExchanger: true}, Today: expect.Expected{Known: true, Duty: clean + tt.loss}}},
			at:      make(map[string]term), sheet: sheet{&Working{}},
		}
		p.expected()
		for _, l := range p.Sections[0].Lines {
			if want, ok := tt.want[l.Symbol]; ok && l.Formula != want {
				t.Errorf("%v: %s is worked as %s, want %s", tt.arrangement, l.Symbol, l.Formula, want)
			}
		}
		for symbol, want := range map[string]float64{"UA": tt.UA, "ε": tt.eps, "Qd": (clean + tt.loss) / 1e3} {
			got := parse(strings.Fields(shownAs(p.Working, symbol))[0])
			if want != 0 && !(math.Abs(got/want-1) < 2e-5) {
				t.Errorf("%v: %s is %g, want %g", tt.arrangement, symbol, got, want)
			}
		}
		if tt.Q != 0 && !(math.Abs(clean/1e3/tt.Q-1) < 3e-5) {
			t.Errorf("%v: %g W, want %g kW", tt.arrangement, clean, tt.Q)
		}
	}
}
