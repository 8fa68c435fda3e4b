package seawater

import (
	"testing"

	"heatreeve/thermo"
)

var sink float64

func benchmark(b *testing.B, at func(T, p float64) (thermo.Properties, error)) {
	b.ReportAllocs()
	T := 293.15
	for b.Loop() {
		s, _ := at(T, 3e5)
		sink += s.Enthalpy + s.Density + s.Cp
		T += 1e-9 // never the same state twice
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/state")
}

func BenchmarkSeawater(b *testing.B)      { benchmark(b, mustNew(b, 0.035).At) }
func BenchmarkSeawaterNaive(b *testing.B) { benchmark(b, naive(0.035)) }
