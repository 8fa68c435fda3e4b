package oil

import (
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

// Vapour pressures of n-hexane and n-decane by the Antoine equations of the NIST Chemistry
// WebBook (from memory), log10(p/bar) = a − b/(T/K + c), within 3 %; critical points of
// handbooks (from memory), 30.25 and 21.1 bar, within 4 %.
func TestVapourPressure(t *testing.T) {
	for _, tt := range []struct{ sg, tb, pc, a, b, c float64 }{
		{0.6640, 341.9, 30.25e5, 4.00266, 1171.53, -48.784},
		{0.7342, 447.3, 21.1e5, 4.07857, 1501.268, -78.67},
	} {
		b := newBoiling(tt.sg, math.Cbrt(1.8*tt.tb)/tt.sg)
		if !(math.Abs(b.pc/tt.pc-1) <= 0.04) {
			t.Errorf("boils at %g K: critical pressure %.4g Pa, want %g", tt.tb, b.pc, tt.pc)
		}
		if got := b.pressure(tt.tb); !(math.Abs(got/101325-1) <= 1e-12) {
			t.Errorf("%g Pa at its boiling point of %g K", got, tt.tb)
		}
		for T := 293.15; T < 374; T += 20 {
			want := 1e5 * math.Pow(10, tt.a-tt.b/(T+tt.c))
			got := b.pressure(T)
			t.Logf("boils at %g K: %.4g Pa at %g K, Antoine %.4g", tt.tb, got, T, want)
			if T > 330 || tt.tb < 400 { // below, the equation of decane is extrapolated
				if !(math.Abs(got/want-1) <= 0.03) {
					t.Errorf("%.5g Pa at %g K, want %.5g", got, T, want)
				}
			}
			if back := b.temperature(got); !(math.Abs(back-T) <= 1e-9) {
				t.Errorf("%g Pa: boils at %.12g K, want %g", got, back, T)
			}
		}
	}
}

// A cut ends 30 K before a substance of its mean boiling point boils: one of Watson 12 and
// 720 kg/m³ (SG 0.7203) has that at (12·0.7203)³/1.8 = 358.8 K and one atmosphere.
func TestBoilingEndsThePhase(t *testing.T) {
	f := fluidtest.Must(Petroleum(720, 12, "gasoline"))(t)
	_, hi := f.Span(101325)
	if !(math.Abs(hi-328.8) <= 0.3) {
		t.Errorf("ends at %.2f K, want 328.8", hi)
	}
	if _, high := f.Span(maxPressure); !math.IsInf(high, 1) {
		t.Errorf("ends at %g K under %g Pa", high, maxPressure)
	}
	_, err := f.At(hi+0.01, 101325)
	if e := new(thermo.RangeError); !errors.As(err, &e) || e.Bound != hi || !strings.HasPrefix(e.Why, "boiling point of a substance like it") {
		t.Errorf("above: %v", err)
	}
	if _, err := f.At(hi-0.01, 101325); err != nil {
		t.Error(err)
	}
	_, err = f.At(260, 100)
	if e := new(thermo.RangeError); !errors.As(err, &e) || e.Quantity != "pressure" || !strings.Contains(e.Why, "boils") {
		t.Errorf("260 K at 100 Pa: %v", err)
	}
}

func TestBoilingIsNotKnownWithoutWatson(t *testing.T) {
	f := fluidtest.Must(Petroleum(720, 0, "gasoline"))(t)
	if _, hi := f.Span(1e4); !math.IsInf(hi, 1) || !strings.Contains(f.Source(), "boiling not known") {
		t.Errorf("%s spans to %g K", f.Source(), hi)
	}
	if g := fluidtest.Must(Petroleum(720, 12, "gasoline"))(t); strings.Contains(g.Source(), "not known") || !strings.Contains(g.Source(), "Lee and Kesler") {
		t.Error(g.Source())
	}
}

// The critical pressure as its authors wrote it, in psi with the boiling point in °R (from
// memory), meets the form in SI within 2e-3.
func TestCriticalPressure(t *testing.T) {
	for _, tt := range []struct{ sg, kw float64 }{{0.65, 12.8}, {0.8, 11.8}, {0.95, 11.4}, {1.05, 10}} {
		T := math.Pow(tt.sg*tt.kw, 3)
		psi := math.Exp(8.3634 - 0.0566/tt.sg - (0.24244+2.2898/tt.sg+0.11857/(tt.sg*tt.sg))*1e-3*T +
			(1.4685+3.648/tt.sg+0.47227/(tt.sg*tt.sg))*1e-7*T*T - (0.42019+1.6977/(tt.sg*tt.sg))*1e-10*T*T*T)
		if got := criticalPressure(tt.sg, tt.kw); !(math.Abs(got/(psi*6894.757)-1) <= 2e-3) {
			t.Errorf("SG %g, Watson %g: %.6g Pa, want %.6g", tt.sg, tt.kw, got, psi*6894.757)
		}
	}
}
