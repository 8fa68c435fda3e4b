package signal

import (
	"math"
	"testing"

	"heatreeve/ingest/quality"
)

// The bands of NAMUR NE 43 and their ends. In the span a current is linear; at 3.8 mA it is
// -1.25 % of it, at 20.5 mA 103.125 %.
func TestCurrent(t *testing.T) {
	c := Current{Lo: 273.15, Hi: 473.15, Slack: 0.01} // 0 to 200 °C
	for _, tt := range []struct {
		mA, celsius float64
		mark        quality.Mark
	}{
		{4, 0, quality.None}, {12, 100, quality.None}, {20, 200, quality.None}, {5.6, 20, quality.None},
		{3.992, -0.1, quality.None}, {20.008, 200.1, quality.None}, // within the slack
		{3.98, -0.25, quality.BelowSpan}, {3.8, -2.5, quality.BelowSpan}, {3.7, -3.75, quality.BelowSpan}, {3.6, -5, quality.BelowSpan},
		{20.02, 200.25, quality.AboveSpan}, {20.5, 206.25, quality.AboveSpan}, {20.8, 210, quality.AboveSpan}, {21, 212.5, quality.AboveSpan},
	} {
		got, m := c.Convert(tt.mA)
		if m != tt.mark || math.Abs(got-273.15-tt.celsius) > 1e-9 {
			t.Errorf("%v mA: %v °C, %v; want %v, %v", tt.mA, got-273.15, m, tt.celsius, tt.mark)
		}
	}
	for _, mA := range []float64{3.599, 0, -4, 21.001, 24, 1e300, math.NaN(), math.Inf(1), math.Inf(-1)} {
		if got, m := c.Convert(mA); m != quality.Failed || !math.IsNaN(got) {
			t.Errorf("%v mA: %v, %v; want none, %v", mA, got, m, quality.Failed)
		}
	}
	if lo, hi := Within(); math.Abs(lo+0.025) > 1e-15 || math.Abs(hi-1.0625) > 1e-15 {
		t.Errorf("within %v to %v of the span, want -2.5 %% to 106.25 %%", lo, hi)
	}
}

// Of a reversed span, of which 4 mA is the high end.
func TestReversedCurrent(t *testing.T) {
	if got, m := (Current{Lo: 400, Hi: 300}).Convert(8); got != 375 || m != quality.None {
		t.Errorf("8 mA of 400 to 300: %v, %v; want 375", got, m)
	}
}

func TestRoot(t *testing.T) {
	mA := RootOfCurrent(10, 0.05, 0.02)
	mbar := Root{Full: 10, Span: 250, CutOff: 0.05}
	for _, tt := range []struct {
		name string
		r    Root
		x    float64
		flow float64
		mark quality.Mark
	}{
		{"full", mA, 20, 10, quality.None}, {"a quarter of the pressure is half the flow", mA, 8, 5, quality.None},
		{"a hundredth is a tenth", mA, 4.16, 1, quality.None}, {"none", mA, 4, 0, quality.None},
		{"just cut off", mA, 4.0399, 0, quality.None}, {"just not", mA, 4.0401, 0.50062, quality.None},
		{"zero off within the slack", mA, 3.99, 0, quality.None}, {"zero off", mA, 3.9, 0, quality.BelowSpan},
		{"above the span", mA, 20.4, 10 * math.Sqrt(1.025), quality.AboveSpan},
		{"pressure", mbar, 62.5, 5, quality.None}, {"pressure in full", mbar, 250, 10, quality.None}, {"no pressure", mbar, 0, 0, quality.None},
		{"pressure cut off", mbar, 0.624, 0, quality.None}, {"a little the other way", mbar, -0.624, 0, quality.None},
		{"the other way", mbar, -2, 0, quality.BelowSpan}, {"not cut", Root{Full: 10, Span: 250}, 0.025, 0.1, quality.None},
	} {
		if got, m := tt.r.Convert(tt.x); m != tt.mark || math.Abs(got-tt.flow) > 1e-5 {
			t.Errorf("%s: %v gives %v, %v; want %v, %v", tt.name, tt.x, got, m, tt.flow, tt.mark)
		}
	}
	for _, x := range []float64{3.5, 22, math.NaN()} {
		if got, m := mA.Convert(x); m != quality.Failed || !math.IsNaN(got) {
			t.Errorf("%v mA: %v, %v; want a failure", x, got, m)
		}
	}
}

// IEC 60751:2008, table 1, which has two decimals; those with four are worked from the
// standard's equation elsewhere and agree with the table. From -200 to -60 and above 200 °C
// quoted from memory.
var pt100 = []struct{ celsius, ohm, digit float64 }{
	{-200, 18.52, 0.01}, {-150, 39.72, 0.01}, {-100, 60.26, 0.01}, {-50, 80.3063, 1e-4}, {0, 100, 1e-4}, {10, 103.9025, 1e-4}, {25, 109.7347, 1e-4},
	{50, 119.3971, 1e-4}, {80, 130.8968, 1e-4}, {90, 134.7069, 1e-4}, {100, 138.5055, 1e-4}, {150, 157.3251, 1e-4}, {200, 175.8560, 1e-4},
	{300, 212.05, 0.01}, {400, 247.09, 0.01}, {500, 280.98, 0.01}, {600, 313.71, 0.01}, {700, 345.28, 0.01}, {800, 375.70, 0.01}, {850, 390.48, 0.01},
}

// Half of the last digit of the table, over the least slope in it of 0.29 ohm/K (at 850 °C),
// is all that the temperature may be off.
func TestPlatinum(t *testing.T) {
	for _, r0 := range []float64{100, 500, 1000} {
		for _, tt := range pt100 {
			r := Resistance{R0: r0, Lead: 0.7}
			ohm := math.Min(math.Max(tt.ohm, 100*leastRatio), 100*greatestRatio)
			got, m := r.Convert(ohm*r0/100 + 0.7)
			if m != quality.None || math.Abs(got-273.15-tt.celsius) > tt.digit/2/0.29 {
				t.Errorf("Pt%v at %v ohm: %v °C, %v; want %v", r0, tt.ohm, got-273.15, m, tt.celsius)
			}
		}
	}
	for _, ohm := range []float64{0, 18.51, 390.49, 1e9, -1, math.NaN(), math.Inf(1)} {
		if got, m := (Resistance{R0: 100}).Convert(ohm); m != quality.Failed || !math.IsNaN(got) {
			t.Errorf("%v ohm: %v, %v; want a failure", ohm, got, m)
		}
	}
}

// There and back over the whole table, to a nanokelvin.
func TestPlatinumThereAndBack(t *testing.T) {
	for c := coldest; c <= hottest; c += 0.37 {
		got, m := (Resistance{R0: 100}).Convert(100 * ratio(c))
		if m != quality.None || math.Abs(got-273.15-c) > 1e-9 {
			t.Errorf("%v °C comes back as %v, %v", c, got-273.15, m)
		}
	}
}

// Two wires of 0.385 ohm are about a kelvin of a Pt100, and a tenth of it of a Pt1000 (IEC
// 60751: 0.385 ohm/K between 0 and 100 °C).
func TestLeads(t *testing.T) {
	for r0, want := range map[float64]float64{100: 1, 1000: 0.1} {
		with, _ := Resistance{R0: r0, Lead: 0.385}.Convert(1.2 * r0)
		without, _ := Resistance{R0: r0}.Convert(1.2 * r0)
		if d := without - with; math.Abs(d-want) > 0.02*want {
			t.Errorf("Pt%v: the leads are %v K, want about %v", r0, d, want)
		}
	}
}

// Whatever number comes, there is a finite quantity or a failure.
func FuzzConvert(f *testing.F) {
	for _, tt := range pt100 {
		f.Add(tt.ohm, 0.4)
	}
	f.Add(3.6, 0.0)
	f.Add(21.0, 0.0)
	f.Add(-1e308, 1e308)
	f.Fuzz(func(t *testing.T, x, other float64) {
		all := map[string]interface {
			Convert(float64) (float64, quality.Mark)
		}{
			"current": Current{Lo: 0, Hi: 1e6, Slack: 0.1}, "root of current": RootOfCurrent(1e3, 0.05, 0.1),
			"root": Root{Full: 1e3, Span: 250, CutOff: 0.05}, "Pt100": Resistance{R0: 100, Lead: math.Abs(other)},
		}
		for name, c := range all {
			got, m := c.Convert(x)
			if m.Quality() == quality.Bad != math.IsNaN(got) && !math.IsNaN(x) {
				t.Errorf("%s: %v gives %v, %v", name, x, got, m)
			}
			if name == "Pt100" && m == quality.None {
				if back := 100*ratio(got-273.15) + math.Abs(other); math.Abs(back-x) > 1e-6*math.Max(1, math.Abs(x)) {
					t.Errorf("%v ohm gives %v K, which has %v ohm", x, got, back)
				}
			}
		}
	})
}
