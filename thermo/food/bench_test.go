package food

import (
	"math"
	"testing"

	"heatreeve/thermo/fluidtest"
)

func BenchmarkMilk(b *testing.B) {
	fluidtest.PerProperties(b, mustProduct(b, "whole milk"), 333, 6e5)
}

// naive is the same mixture component by component, with math.Pow: h without the pressure
// term.
func naive(c Composition, t float64) (h, cp, rho float64) {
	var v float64
	for _, s := range c.shares() {
		var x, density float64
		for k := range s.of.cp {
			x += s.of.cp[k] * math.Pow(t, float64(k))
			h += s.fraction * s.of.cp[k] * math.Pow(t, float64(k+1)) / float64(k+1)
			density += s.of.density[k] * math.Pow(t, float64(k))
		}
		cp += s.fraction * x
		v += s.fraction / density
	}
	return h, cp, 1 / v
}

func TestNaiveAgrees(t *testing.T) {
	for _, p := range products {
		f := mustProduct(t, p.name)
		for T := 274.0; T < 373; T += 7 {
			s, err := f.At(T, atm)
			h, cp, rho := naive(p.Composition, T-zeroC)
			if err != nil || !(math.Abs(s.Enthalpy/h-1) <= 1e-12) || !(math.Abs(s.Cp/cp-1) <= 1e-13) || !(math.Abs(s.Density/rho-1) <= 1e-13) {
				t.Errorf("%s at %g K: %+v, %v; naive h %g, cp %g, density %g", p.name, T, s, err, h, cp, rho)
			}
		}
	}
}

func BenchmarkMilkNaive(b *testing.B) {
	c := products[0].Composition
	fluidtest.PerState(b, 333, func(T float64) float64 {
		h, cp, rho := naive(c, T-zeroC)
		return h + cp + rho
	})
}
