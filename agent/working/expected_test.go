package working

import (
	"math"
	"testing"

	"heatreeve/agent/design"
	"heatreeve/agent/design/expect"
)

var outdoor = expect.Scale{Tag: "TT-900", Unit: "°C", Factor: 1, Offset: 273.15}

// Each sort of expectation is worked in the unit of its tags: the formulas are those that a
// hand would write, and come to what the expectation itself says.
func TestExpectedDutyIsWorked(t *testing.T) {
	axis := expect.Axis{Scale: outdoor, At: []float64{258.15, 263.15, 273.15, 288.15}}
	rate := expect.Axis{Scale: expect.Scale{Tag: "FT-900", Unit: "t/h", Factor: 1 / 3.6}, Driver: 1, At: []float64{0, 1 / 3.6, 2 / 3.6}}
	var week expect.Week
	week.Duty[37], week.Uncertainty = 250e3, 0.04
	hours := make([]float64, expect.HoursAWeek)
	hours[37] = 12e3
	warm := expect.Term{Scale: outdoor, Low: 258.15, High: 293.15, Bend: expect.Below, Limit: 288.15, Centre: 9, Slope: 20e3, Error: 100}
	busy := expect.Term{Scale: rate.Scale, Driver: 1, Low: 0, High: 1, Centre: 0.5 / 3.6, Slope: 36e3, Error: 100}
	learned := expect.Baseline{Duty: 300e3, Terms: []expect.Term{warm, busy}, Correlation: []float64{0}, Hours: hours, Residual: 8e3, Lag: 0.2, Samples: 2000, Cell: 12, Span: 60}
	for _, tt := range []struct {
		name     string
		of       expect.Expectation
		formulas map[string]string
		Qd       string
	}{
		{"fixed", expect.Fixed{Duty: 640e3}, nil, "640"},
		// −4 °C lies 0.6 of the way from −10 to 0 °C.
		{"table", expect.Table{Axes: []expect.Axis{axis}, Duty: []float64{450e3, 400e3, 300e3, 80e3}, Uncertainty: 0.05},
			map[string]string{"w1": "(-4 − (-10)) / (0 − (-10))", "Qd": "400 + (300 − 400) × 0.6", "ud": "0.05 × 340"}, "340"},
		// and 1.5 t/h half way from 1 to 2.
		{"table of two", expect.Table{Axes: []expect.Axis{axis, rate}, Duty: []float64{0, 0, 0, 0, 300e3, 500e3, 0, 200e3, 400e3, 0, 0, 0}},
			map[string]string{"w2": "(1.5 − 1) / (2 − 1)", "Qa": "300 + (500 − 300) × 0.5", "Qb": "200 + (400 − 200) × 0.5", "Qd": "400 + (300 − 400) × 0.6"}, "340"},
		{"week", week, map[string]string{"ud": "0.04 × 250"}, "250"},
		// 19 K below the limit, 10 more than on average: 200 kW; 1 t/h more: 10 kW.
		{"baseline", learned, map[string]string{"z1": "15 − (-4)", "Qd": "300 + 12 + 20 × (19 − 9) + 10 × (1.5 − 0.5)"}, "522"},
	} {
		by := expect.Conditions{Hour: 37, Drivers: []float64{269.15, 1.5 / 3.6}}
		g := design.Grounds{Target: design.Target{Expect: tt.of}, Today: tt.of.At(by), By: by}
		p := &page{Subject: &Subject{Grounds: g}, at: make(map[string]term), sheet: sheet{&Working{}}}
		p.expected()
		if !g.Today.Known {
			t.Fatalf("%s: %s", tt.name, g.Today.Why)
		}
		for _, l := range p.Sections[0].Lines {
			if want, ok := tt.formulas[l.Symbol]; ok && l.Formula != want {
				t.Errorf("%s: %s is worked as %s, want %s", tt.name, l.Symbol, l.Formula, want)
			}
			delete(tt.formulas, l.Symbol)
		}
		if got := shownAs(p.Working, "Qd"); got != tt.Qd+" kW" || !(math.Abs(parse(tt.Qd)*1e3-g.Today.Duty) < 1e-6*g.Today.Duty) || len(tt.formulas) > 0 {
			t.Errorf("%s: Qd is %s, want %s and %g W; not worked: %v", tt.name, got, tt.Qd, g.Today.Duty, tt.formulas)
		}
	}
}

// What is on the side of a limit that does not count adds what the centre takes away.
func TestDriverBeyondItsLimit(t *testing.T) {
	b := expect.Baseline{Duty: 300e3, Terms: []expect.Term{{Scale: outdoor, Low: 258.15, High: 293.15, Bend: expect.Below, Limit: 288.15, Centre: 9, Slope: 20e3}}, Residual: 8e3, Samples: 2000, Cell: 2000, Span: 60}
	by := expect.Conditions{Drivers: []float64{291.15}}
	p := &page{Subject: &Subject{Grounds: design.Grounds{Target: design.Target{Expect: b}, Today: b.At(by), By: by}}, at: make(map[string]term), sheet: sheet{&Working{}}}
	p.expected()
	if got := shownAs(p.Working, "Qd"); got != "120 kW" || shownAs(p.Working, "z1") != "0 °C" {
		t.Errorf("Qd is %s, z1 %s; want 300 − 20·9 = 120", got, shownAs(p.Working, "z1"))
	}
}
