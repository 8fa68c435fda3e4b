package table

import (
	"math"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

func BenchmarkTable(b *testing.B) {
	fluidtest.PerProperties(b, mustNew(b, air(), Options{Phase: thermo.Gas, Pressure: 101325}), 633, thermo.Atmosphere)
}

// With vapour pressures, in the stretch where the boiling point has to be worked out.
func BenchmarkBoiling(b *testing.B) {
	fluidtest.PerProperties(b, mustNew(b, boilingOil(), Options{}), 391, thermo.Atmosphere)
}

func BenchmarkPolynomial(b *testing.B) {
	fluidtest.PerProperties(b, mustPolynomial(b, liquidCp, liquidDensity, liquidRange), 433, thermo.Atmosphere)
}

// naive is the table as one would write it down: the slopes anew at every state, the row
// sought from the first one on, the enthalpy summed up to there, powers by math.Pow.
func naive(points []Point, T float64) (h, cp, rho float64) {
	var x, y, d []float64
	for _, p := range points {
		x, y, d = append(x, p.T), append(y, p.Cp), append(d, p.Density)
	}
	cps, rhos := interpolate(x, y), interpolate(x, d)
	power := func(c cubic, t float64) (sum float64) {
		for k, v := range c {
			sum += v * math.Pow(t, float64(k))
		}
		return sum
	}
	area := func(c cubic, t float64) (sum float64) {
		for k, v := range c {
			sum += v * math.Pow(t, float64(k+1)) / float64(k+1)
		}
		return sum
	}
	k := 0
	for ; k < len(cps)-1 && x[k+1] <= T; k++ {
		h += area(cps[k], x[k+1]-x[k])
	}
	t := T - x[k]
	return h + area(cps[k], t), power(cps[k], t), power(rhos[k], t)
}

// The naive form is the same equation.
func TestNaiveAgrees(t *testing.T) {
	f := mustNew(t, air(), Options{})
	for T := 251.0; T < 700; T += 13 {
		p, err := f.At(T, thermo.Atmosphere)
		h, cp, rho := naive(air(), T)
		if err != nil || !(math.Abs(p.Enthalpy/h-1) <= 1e-12) || !(math.Abs(p.Cp/cp-1) <= 1e-12) || !(math.Abs(p.Density/rho-1) <= 1e-12) {
			t.Errorf("%g K: %+v, %v; naive h %g, cp %g, density %g", T, p, err, h, cp, rho)
		}
	}
}

func BenchmarkNaive(b *testing.B) {
	points := air()
	fluidtest.PerState(b, 633, func(T float64) float64 {
		h, cp, rho := naive(points, T)
		return h + rho + cp
	})
}
