package aqueous

import (
	"math"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

func BenchmarkSolution(b *testing.B) {
	for _, tt := range []struct {
		name, solute string
		p            float64
	}{
		{"propylene glycol", "propylene glycol", pressure},
		{"sodium chloride", "sodium chloride", pressure},
		{"ammonia, may boil", "ammonia", 40e3},
	} {
		f := mustNew(b, tt.solute, 0.2, 0.006)
		b.Run(tt.name, func(b *testing.B) { fluidtest.PerProperties(b, f, 280, tt.p) })
	}
}

// BenchmarkNaive is the double sum as printed, at the same states.
func BenchmarkNaive(b *testing.B) {
	s, err := lookup("propylene glycol")
	if err != nil {
		b.Fatal(err)
	}
	naive := func(T, p float64) (thermo.Properties, error) { return s.naive(T, p, 0.2), nil }
	fluidtest.PerProperties(b, fluidtest.Form(naive), 280, pressure)
}

func BenchmarkUncertainty(b *testing.B) {
	f := mustNew(b, "ethylene glycol", 0.2, 0.006)
	fluidtest.PerState(b, 280, func(T float64) float64 {
		cp, density := f.Uncertainty(T, pressure)
		return cp + density
	})
}

// naive evaluates the polynomials term by term with math.Pow.
func (s *solute) naive(T, p, x float64) thermo.Properties {
	sum := func(c *[4][6]float64, term func(i, j, t, d float64) float64, t float64) float64 {
		var y float64
		for i := range c {
			for j := range c[i] {
				y += c[i][j] * term(float64(i), float64(j), t, x-s.baseX)
			}
		}
		return y
	}
	value := func(i, j, t, d float64) float64 { return math.Pow(t, i) * math.Pow(d, j) }
	slope := func(i, j, t, d float64) float64 { return i * math.Pow(t, max(i-1, 0)) * math.Pow(d, j) }
	integral := func(i, j, t, d float64) float64 { return math.Pow(t, i+1) / (i + 1) * math.Pow(d, j) }
	t := T - s.baseT
	middle := (273.15 + s.maxT) / 2
	cp, rho, base := sum(&s.cp, value, t), sum(&s.density, value, t), sum(&s.density, value, middle-s.baseT)
	h := sum(&s.cp, integral, t) + (p-101325)*(1/base+middle*sum(&s.density, slope, middle-s.baseT)/(base*base))
	return thermo.Properties{Enthalpy: h, InternalEnergy: h - p/rho, Cp: cp, Cv: cp, Density: rho}
}

// The short form and the double sum must agree.
func TestNaive(t *testing.T) {
	for k := range solutes {
		s := &solutes[k]
		x := 0.7 * s.max
		m := s.mix(s.name, x, 0)
		for T := m.bounds.MinT + 0.1; T < s.maxT; T += 3.7 {
			got, err := m.At(T, 1e6)
			want := s.naive(T, 1e6, x)
			if err != nil || !(math.Abs(got.Enthalpy-want.Enthalpy) <= 1e-8) || !(math.Abs(got.Cp/want.Cp-1) <= 1e-12) || !(math.Abs(got.Density/want.Density-1) <= 1e-12) {
				t.Errorf("%s %g K: %+v, %v; the double sum gives %+v", s.name, T, got, err, want)
			}
		}
	}
}
