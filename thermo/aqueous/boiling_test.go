package aqueous

import (
	"math"
	"testing"

	"heatreeve/thermo/water"
)

// Boiling points of the pure alcohols: 78.3 °C and 64.7 °C at 1 atm, and by Stull (Ind.
// Eng. Chem. 39, 1947) in mmHg, all from memory.
func TestAlcoholBoiling(t *testing.T) {
	const mmHg = 133.322
	for _, tt := range []struct {
		b            boiling
		p, want, tol float64
	}{
		{&ethanol, 101325, 78.3, 0.2}, {&methanol, 101325, 64.6, 0.2},
		{&ethanol, 100 * mmHg, 34.9, 0.5}, {&ethanol, 10 * mmHg, -2.3, 2}, {&ethanol, 5 * mmHg, -12, 2},
		{&methanol, 100 * mmHg, 21.2, 1}, {&methanol, 10 * mmHg, -16.2, 2}, {&methanol, 5 * mmHg, -25.3, 2},
	} {
		if got := tt.b.temperature(tt.p) - 273.15; !(math.Abs(got-tt.want) <= tt.tol) {
			t.Errorf("%s: %.2f °C at %g Pa, want %.1f", tt.b.why(), got, tt.p, tt.want)
		}
	}
}

// The bubble point of ammonia in water at both ends, water by IAPWS-IF97 and ammonia
// at 239.82 K and 1 atm, and between them by the partial pressures over solutions at
// 20 °C in Perry's Chemical Engineers' Handbook (from memory), grams in 100 g of
// water and mmHg, to which water adds by Raoult's law. The bound keeps below.
func TestBubblePoint(t *testing.T) {
	for _, p := range []float64{2e3, 5e3, 2e4, 1e5, 5e5, 2e6} {
		want, err := water.SaturationTemperature(p)
		if err != nil {
			t.Fatal(err)
		}
		if got := ammoniaBoils(0).temperature(p); !(got <= want && got >= want-2) {
			t.Errorf("water at %g Pa boils at %g K, want %g", p, got, want)
		}
	}
	if got := ammoniaBoils(1).temperature(101325); !(got <= 239.82 && got >= 237.8) {
		t.Errorf("ammonia boils at %g K, want 239.82", got)
	}
	const mmHg = 133.322
	for grams, partial := range map[float64]float64{5: 31.7, 10: 69.6, 15: 114, 20: 166, 25: 227, 30: 298, 40: 470} {
		x := grams / (100 + grams)
		p := (partial + 17.5*(1-x)) * mmHg
		if got := ammoniaBoils(x).temperature(p); !(got <= 293.15 && got >= 291.15) {
			t.Errorf("ammonia %.3g %% at %.0f Pa: bubble point %g K, want 293.15", 100*x, p, got)
		}
	}
}

// The shortcut over the boiling point in At must not let anything boil.
func TestBoilsBelow(t *testing.T) {
	for k := range solutes {
		s := &solutes[k]
		for _, x := range []float64{0, s.max / 2, s.max} {
			m := s.mix(s.name, x, 0)
			for p := m.bounds.MinP; p < maxPressure; p *= 1.01 {
				_, hi := m.Span(p)
				if _, err := m.At(m.bounds.MaxT, p); (err == nil) != (hi >= m.bounds.MaxT) {
					t.Errorf("%s %g at %g Pa: boils at %g K, error %v", s.name, x, p, hi, err)
				}
			}
			t.Logf("%s %g: boiling no bound from %.0f Pa", s.name, x, m.boilsBelow)
		}
	}
}
