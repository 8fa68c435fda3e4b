package solid

import (
	"math"
	"testing"
)

var sink float64

func BenchmarkCarbonSteel(b *testing.B) {
	f := mustNew(b, "carbon steel")
	b.ReportAllocs()
	T := 633.0
	for b.Loop() {
		s, _ := f.At(T, atm)
		sink += s.Enthalpy + s.Cp + s.Density
		T += 1e-9 // never the same state twice
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/state")
}

// The same equation term by term, with math.Pow.
func BenchmarkCarbonSteelNaive(b *testing.B) {
	c := carbonSteel{}.make()
	T := 633.0
	for b.Loop() {
		var h, cp float64
		for k, v := range c.cp {
			cp += v * math.Pow(T-273.15, float64(k))
			h += v * math.Pow(T-273.15, float64(k+1)) / float64(k+1)
		}
		sink += h + cp + c.density
		T += 1e-9
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/state")
}
