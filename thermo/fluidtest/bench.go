package fluidtest

import (
	"math"
	"testing"

	"heatreeve/thermo"
)

// PerState times one state after another from T in K on, none of them twice, and reports
// ns/state. What the states come to is summed up, so that none of it can be left out, and has
// to be a figure.
func PerState(b *testing.B, T float64, state func(T float64) float64) {
	b.Helper()
	b.ReportAllocs()
	var sum float64
	for b.Loop() {
		sum += state(T)
		T += 1e-9
	}
	result(b, sum)
}

type stater interface {
	At(T, p float64) (thermo.Properties, error)
}

// Form works the properties at T in K and p in Pa, as a fluid or as what stands beside it.
type Form func(T, p float64) (thermo.Properties, error)

// At calls the form.
func (f Form) At(T, p float64) (thermo.Properties, error) { return f(T, p) }

// PerProperties is [PerState] for a fluid or a [Form] at p in Pa, without the call between,
// which would show beside 20 ns.
func PerProperties(b *testing.B, f stater, T, p float64) {
	b.Helper()
	b.ReportAllocs()
	var sum float64
	for b.Loop() {
		s, _ := f.At(T, p)
		sum += s.Enthalpy + s.Density + s.Cp
		T += 1e-9
	}
	result(b, sum)
}

func result(b *testing.B, sum float64) {
	b.Helper()
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/state")
	if sum == 0 || math.IsNaN(sum) {
		b.Errorf("%d states come to %g", b.N, sum)
	}
}
