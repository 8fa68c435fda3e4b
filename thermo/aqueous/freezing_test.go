package aqueous

import (
	"math"
	"testing"
)

// Freezing points in °C by mass fraction: ASHRAE Handbook Fundamentals, physical
// properties of secondary coolants, tables of the glycols; CRC Handbook of Chemistry and
// Physics for ethanol, methanol and sodium chloride. All from memory. That of
// ethylene glycol is ASHRAE's own.
func TestFreezingPoints(t *testing.T) {
	for _, tt := range []struct {
		solute       string
		x, want, tol float64
	}{
		{"ethylene glycol", 0.10, -3.2, 1e-9}, {"ethylene glycol", 0.20, -7.8, 1e-9}, {"ethylene glycol", 0.30, -14.1, 1e-9},
		{"ethylene glycol", 0.40, -22.3, 1e-9}, {"ethylene glycol", 0.50, -33.8, 1e-9}, {"ethylene glycol", 0.60, -48.3, 1e-9},
		{"propylene glycol", 0.10, -3.3, 0.6}, {"propylene glycol", 0.20, -7.1, 0.6}, {"propylene glycol", 0.30, -12.7, 0.6},
		{"propylene glycol", 0.40, -21.1, 0.6}, {"propylene glycol", 0.50, -33.5, 1.4}, {"propylene glycol", 0.60, -51.1, 1.2},
		{"ethanol", 0.10, -4.5, 0.6}, {"ethanol", 0.20, -10.9, 0.6}, {"ethanol", 0.40, -29.3, 0.6},
		{"methanol", 0.20, -15.0, 0.6}, {"methanol", 0.40, -38.6, 0.6},
		{"sodium chloride", 0.10, -6.6, 0.6}, {"sodium chloride", 0.20, -16.5, 0.6},
	} {
		f := mustNew(t, tt.solute, tt.x, 0)
		got, _ := f.Span(pressure)
		t.Logf("%s: %.2f °C, table %.1f", f.Name(), got-273.15, tt.want)
		if !(math.Abs(got-273.15-tt.want) <= tt.tol) {
			t.Errorf("%s freezes at %.2f °C, want %.1f within %g K", f.Name(), got-273.15, tt.want, tt.tol)
		}
	}
}

// Between ASHRAE's rows the guard of ethylene glycol is no colder than a straight line
// between them, which lies below a curve that bends down, and it falls all along.
func TestGuardOfEthyleneGlycol(t *testing.T) {
	s, err := lookup("MEG")
	if err != nil {
		t.Fatal(err)
	}
	widest := 0.0
	for k := 1; k < len(s.sooner); k++ {
		a, b := s.sooner[k-1], s.sooner[k]
		for i := range 51 {
			w := float64(i) / 50
			x := (1-w)*a[0] + w*b[0]
			got, line := s.guard(x), (1-w)*a[1]+w*b[1]
			widest = max(widest, got-s.freezesAt(x))
			if !(got >= line-0.005 && got < line+0.5) || x < s.max && !(s.guard(x+1e-4) < got) {
				t.Errorf("%g: guarded at %.3f K, ASHRAE %.3f", x, got, line)
			}
		}
	}
	t.Logf("up to %.2f K above Melinder's", widest)
	if !(math.Abs(widest-2.9) <= 0.05) {
		t.Errorf("up to %.2f K above Melinder's, want 2.9", widest)
	}
}

// With nothing dissolved every one freezes as water does, at 273.15 K, and below 2 % none by
// farther from its polynomial than that is then, at most 0.048 K; from there on by it, but
// for ethylene glycol.
func TestFreezesAsWater(t *testing.T) {
	worst := 0.0
	for k := range solutes {
		s := &solutes[k]
		for _, x := range [][2]float64{{0, 0}, {0.02, 0.01}, {0.01, 0.06}} {
			if lo, _ := mustNew(t, s.name, x[0], x[1]).Span(pressure); lo != 273.15 {
				t.Errorf("%s of %g ± %g freezes at %.10g K, want 273.15", s.name, x[0], x[1], lo)
			}
		}
		off := s.soonest(0) - 273.15
		worst = max(worst, math.Abs(off))
		last := math.Inf(1)
		for i := range 301 {
			x := 1e-4 * float64(i)
			d := s.soonest(x) - s.guard(x)
			if !(math.Abs(d) <= math.Abs(off) && d*off >= 0 && math.Abs(d) <= last) || x >= 0.02 && d != 0 {
				t.Errorf("%s of %g is guarded %.5f K from what else it would be, %.5f at none", s.name, x, d, off)
			}
			last = math.Abs(d)
		}
		if s.sooner == nil && s.guard(0.02) != s.freezesAt(0.02) {
			t.Errorf("%s of 2 %% is guarded at %g K, freezes at %g", s.name, s.guard(0.02), s.freezesAt(0.02))
		}
	}
	t.Logf("the polynomials are up to %.4f K off water", worst)
	if !(worst <= 0.0475) {
		t.Errorf("the polynomials are up to %.4f K off water, want 0.0473", worst)
	}
}

// A vague strength freezes early: as a mixture weaker by twice its uncertainty.
func TestVagueStrengthFreezesEarly(t *testing.T) {
	for _, s := range Solutes() {
		exact, vague, weaker := mustNew(t, s, 0.15, 0), mustNew(t, s, 0.15, 0.01), mustNew(t, s, 0.13, 0)
		if got, want := vague.Bounds().MinT, weaker.Bounds().MinT; !(math.Abs(got-want) <= 1e-9) || !(got > exact.Bounds().MinT) {
			t.Errorf("%s freezes at %g K, want %g, above %g", s, got, want, exact.Bounds().MinT)
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
			a, b := s.freezesAt(x), s.freezesAt(x+s.max/1000)
			c, d := s.guard(x), s.guard(x+s.max/1000)
			if !(b < a) || !(d < c) {
				t.Errorf("%s freezes at %g K, guarded at %g, at %g; at %g K and %g a little stronger", s.name, a, c, x, b, d)
			}
		}
	}
}
