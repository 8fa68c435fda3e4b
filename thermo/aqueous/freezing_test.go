package aqueous

import (
	"math"
	"testing"
)

// Freezing points in °C by mass fraction: ASHRAE Handbook Fundamentals, physical
// properties of secondary coolants, tables of the glycols; CRC Handbook of Chemistry and
// Physics for ethanol, methanol and sodium chloride. All from memory. Ethylene glycol
// of 40 % and more freezes later here than there, which is no safe side: the comment of
// the package asks for a margin.
func TestFreezingPoints(t *testing.T) {
	for _, tt := range []struct {
		solute       string
		x, want, tol float64
	}{
		{"ethylene glycol", 0.10, -3.2, 0.6}, {"ethylene glycol", 0.20, -7.8, 0.6}, {"ethylene glycol", 0.30, -14.1, 0.6},
		{"ethylene glycol", 0.40, -22.3, 1.6}, {"ethylene glycol", 0.50, -33.8, 2.3}, {"ethylene glycol", 0.60, -48.3, 3},
		{"propylene glycol", 0.10, -3.3, 0.6}, {"propylene glycol", 0.20, -7.1, 0.6}, {"propylene glycol", 0.30, -12.7, 0.6},
		{"propylene glycol", 0.40, -21.1, 0.6}, {"propylene glycol", 0.50, -33.5, 1.4}, {"propylene glycol", 0.60, -51.1, 1.2},
		{"ethanol", 0.10, -4.5, 0.6}, {"ethanol", 0.20, -10.9, 0.6}, {"ethanol", 0.40, -29.3, 0.6},
		{"methanol", 0.20, -15.0, 0.6}, {"methanol", 0.40, -38.6, 0.6},
		{"sodium chloride", 0.10, -6.6, 0.6}, {"sodium chloride", 0.20, -16.5, 0.6},
	} {
		f := mustNew(t, tt.solute, tt.x, 0)
		got, _ := f.Span(pressure)
		t.Logf("%s: %.2f °C, table %.1f", f.Name(), got-273.15, tt.want)
		if math.Abs(got-273.15-tt.want) > tt.tol {
			t.Errorf("%s freezes at %.2f °C, want %.1f within %g K", f.Name(), got-273.15, tt.want, tt.tol)
		}
	}
}

// A vague strength freezes early: as a mixture weaker by twice its uncertainty.
func TestVagueStrengthFreezesEarly(t *testing.T) {
	for _, s := range Solutes() {
		exact, vague, weaker := mustNew(t, s, 0.2, 0), mustNew(t, s, 0.2, 0.01), mustNew(t, s, 0.18, 0)
		if got, want := vague.Bounds().MinT, weaker.Bounds().MinT; math.Abs(got-want) > 1e-9 || !(got > exact.Bounds().MinT) {
			t.Errorf("%s freezes at %g K, want %g, above %g", s, got, want, exact.Bounds().MinT)
		}
		vaguest, water := mustNew(t, s, 0.1, 0.1), mustNew(t, s, 0, 0)
		if got, want := vaguest.Bounds().MinT, water.Bounds().MinT; got != want {
			t.Errorf("%s that may be mere water freezes at %g K, want %g", s, got, want)
		}
	}
}

// The freezing point falls all the way to the largest concentration, so that a
// weaker mixture is the safe side.
func TestFreezingPointFalls(t *testing.T) {
	for k := range solutes {
		s := &solutes[k]
		for i := range 1000 {
			x := s.max * float64(i) / 1000
			if a, b := s.freezesAt(x), s.freezesAt(x+s.max/1000); !(b < a) {
				t.Errorf("%s freezes at %g K at %g, at %g K a little stronger", s.name, a, x, b)
			}
		}
	}
}
