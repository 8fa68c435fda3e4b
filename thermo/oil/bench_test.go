package oil

import (
	"math"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

func BenchmarkPetroleum(b *testing.B) {
	fluidtest.PerProperties(b, fluidtest.Must(Petroleum(850, 11.8, "crude oil"))(b), 333, 1e6)
}

func BenchmarkHeatTransfer(b *testing.B) {
	fluidtest.PerProperties(b, fluidtest.Must(HeatTransfer("diphenyl oxide/biphenyl eutectic"))(b), 573, 1e6)
}

// naive works the same equations from density and Watson factor at every state: h without
// pressure term, from 15 °C.
func naive(rho15, kw float64, k0, T float64) (h, cp, rho float64) {
	alpha := k0 / math.Pow(rho15, 2)
	factor := func(T float64) float64 {
		return math.Exp(-alpha*(T-288.15) - 0.8*math.Pow(alpha*(T-288.15), 2))
	}
	sg := rho15 * factor((60+459.67)/1.8) / 999.016
	at := func(T float64) float64 {
		return 1000 * (1.4651 + 0.2302*kw) * ((0.306469 - 0.16734*sg) + (0.001467-0.000551*sg)*T)
	}
	return (T - 288.15) * at((T+288.15)/2), at(T), rho15 * factor(T)
}

// The naive form is the same equation.
func TestNaiveAgrees(t *testing.T) {
	f := fluidtest.Must(Petroleum(850, 11.8, "crude oil"))(t)
	for T := 260.0; T < 420; T += 7 {
		s, err := f.At(T, thermo.Atmosphere)
		h, cp, rho := naive(850, 11.8, 613.9723, T)
		if err != nil || !(math.Abs(s.Enthalpy/h-1) <= 1e-11) || !(math.Abs(s.Cp/cp-1) <= 1e-13) || !(math.Abs(s.Density/rho-1) <= 1e-13) {
			t.Errorf("%g K: %+v, %v; naive h %g, cp %g, density %g", T, s, err, h, cp, rho)
		}
	}
}

func BenchmarkPetroleumNaive(b *testing.B) {
	fluidtest.PerState(b, 333, func(T float64) float64 {
		h, cp, rho := naive(850, 11.8, 613.9723, T)
		return h + cp + rho
	})
}

// A table read row by row, with straight lines: what the hand would do.
func BenchmarkHeatTransferNaive(b *testing.B) {
	fluidtest.PerState(b, 573, func(T float64) float64 {
		var h float64
		k := 0
		for ; k < len(eutectic)-2 && eutectic[k+1][0] <= T; k++ {
			h += (eutectic[k+1][0] - eutectic[k][0]) * (eutectic[k+1][1] + eutectic[k][1]) / 2
		}
		a, c := eutectic[k], eutectic[k+1]
		x := (T - a[0]) / (c[0] - a[0])
		cp := a[1] + x*(c[1]-a[1])
		return h + (T-a[0])*(a[1]+cp)/2 + cp + a[2] + x*(c[2]-a[2])
	})
}
