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
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/state")
	if sum == 0 || math.IsNaN(sum) {
		b.Errorf("%d states to %g K come to %g", b.N, T, sum)
	}
}

// PerProperties is [PerState] for At of a fluid, or for what stands beside it, at p in Pa.
func PerProperties(b *testing.B, at func(T, p float64) (thermo.Properties, error), T, p float64) {
	b.Helper()
	PerState(b, T, func(T float64) float64 {
		s, _ := at(T, p)
		return s.Enthalpy + s.Density + s.Cp
	})
}
