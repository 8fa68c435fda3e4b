package table

import (
	"math"
	"testing"

	"heatreeve/thermo"
)

var sink float64

func report(b *testing.B) {
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/state")
}

func bench(b *testing.B, f thermo.Fluid, T float64) {
	b.ReportAllocs()
	for b.Loop() {
		s, _ := f.At(T, 101325)
		sink += s.Enthalpy + s.Density + s.Cp
		T += 1e-9 // never the same state twice
	}
	report(b)
}

func BenchmarkTable(b *testing.B) {
	bench(b, mustNew(b, air(), Options{Phase: thermo.Gas, Pressure: 101325}), 633)
}

// With vapour pressures, in the stretch where the boiling point has to be worked out.
func BenchmarkBoiling(b *testing.B) {
	bench(b, mustNew(b, boilingOil(), Options{}), 391)
}

func BenchmarkPolynomial(b *testing.B) {
	bench(b, mustPolynomial(b, liquidCp, liquidDensity, liquidRange), 433)
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
		if err != nil || math.Abs(p.Enthalpy/h-1) > 1e-12 || math.Abs(p.Cp/cp-1) > 1e-12 || math.Abs(p.Density/rho-1) > 1e-12 {
			t.Errorf("%g K: %+v, %v; naive h %g, cp %g, density %g", T, p, err, h, cp, rho)
		}
	}
}

func BenchmarkNaive(b *testing.B) {
	points := air()
	T := 633.0
	for b.Loop() {
		h, cp, rho := naive(points, T)
		sink += h + rho + cp
		T += 1e-9
	}
	report(b)
}
