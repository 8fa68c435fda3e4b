package gas

import (
	"testing"

	"heatreeve/thermo"
)

var sink float64

func benchmark(b *testing.B, f thermo.Fluid, T float64) {
	b.ReportAllocs()
	for b.Loop() {
		s, _ := f.At(T, 101325)
		sink += s.Enthalpy + s.Density + s.Cp
		T += 1e-9 // never the same state twice
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/state")
}

func BenchmarkDryAir(b *testing.B)  { benchmark(b, mustAir(b, Ideal), 423.15) }
func BenchmarkFlueGas(b *testing.B) { benchmark(b, mustNew(b, flue, Ideal), 523.15) }
