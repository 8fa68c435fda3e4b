package table

import (
	"math"
	"testing"

	"heatreeve/thermo"
)

// sound makes sure that a fluid that was accepted has sound properties over the whole of
// its range: finite, above zero, the enthalpy rising.
func sound(t *testing.T, f thermo.Fluid) {
	b := f.Bounds()
	for _, p := range []float64{b.MaxP, math.Sqrt(max(b.MinP, 1e-9*b.MaxP) * b.MaxP), max(b.MinP, 1e-9*b.MaxP)} {
		lo, hi := f.Span(p)
		lo, hi = max(lo, b.MinT), min(hi, b.MaxT)
		last, at := math.Inf(-1), 0.0
		for i := range 65 {
			T := lo + (hi-lo)*float64(i)/64
			if !(T >= lo && T <= hi) || T <= at {
				continue
			}
			s, err := f.At(T, p)
			if err != nil {
				t.Fatalf("%g K, %g Pa: %v", T, p, err)
			}
			for _, v := range []float64{s.Enthalpy, s.InternalEnergy, s.Cp, s.Cv, s.Density} {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					t.Fatalf("%g K, %g Pa: %+v is not finite", T, p, s)
				}
			}
			// An enthalpy of some 1e9 J/kg is told to 1e-7 at best.
			if slack := 1e-13 * (math.Abs(s.Enthalpy) + 1e6); !(s.Cp > 0 && s.Cv > 0 && s.Density > 0 && s.Enthalpy >= last-slack) {
				t.Fatalf("%g K, %g Pa: %+v after an enthalpy of %g", T, p, s, last)
			}
			last, at = s.Enthalpy, T
		}
	}
}

func FuzzNew(f *testing.F) {
	f.Add(300., 350., 450., 2000., 2200., 2500., 900., 860., 780., 0., 10., 1e4, 0.)
	f.Add(300., 310., 700., 170., 170., 170., 8., 3., 0.9, 0., 0., 0., 1e5)
	f.Add(1., 1e6, 2e6, 1e6, 1e-300, 5e-324, 1e6, 1., 1e-9, 1e-300, 1e-200, 1e300, 0.)
	f.Fuzz(func(t *testing.T, t1, t2, t3, c1, c2, c3, d1, d2, d3, v1, v2, v3, gas float64) {
		o := Options{}
		if gas != 0 {
			o = Options{Phase: thermo.Gas, Pressure: gas}
		}
		fluid, err := New("f", "s", []Point{{t1, c1, d1, v1}, {t2, c2, d2, v2}, {t3, c3, d3, v3}}, o)
		if err == nil {
			sound(t, fluid)
		}
	})
}

func FuzzPolynomial(f *testing.F) {
	f.Add(2000., 3.5, -2e-3, 0., 900., -0.65, -1e-4, 260., 520., 0.)
	f.Add(1000., 0.1, 1e-4, 0., 1.29, -4.2e-3, 8e-6, 270., 420., 101325.)
	f.Add(1e4+1e-9, -200., 1., 0., 1e5, 1e5, 1e5, 1e-300, 1e6, 0.)
	f.Fuzz(func(t *testing.T, c0, c1, c2, c3, d0, d1, d2, lo, hi, gas float64) {
		o := Options{MinT: lo, MaxT: hi}
		if gas != 0 {
			o.Phase, o.Pressure = thermo.Gas, gas
		}
		fluid, err := Polynomial("f", "s", []float64{c0, c1, c2, c3}, []float64{d0, d1, d2}, o)
		if err == nil {
			sound(t, fluid)
		}
	})
}
