package water

import (
	"testing"

	"heatreeve/thermo"
)

var sink float64

func benchmark(b *testing.B, at func(T, p float64) thermo.Properties, T, p float64) {
	b.ReportAllocs()
	for b.Loop() {
		s := at(T, p)
		sink += s.Enthalpy + s.Density + s.Cp
		T += 1e-9 // never the same state twice
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/state")
}

func of(f thermo.Fluid) func(T, p float64) thermo.Properties {
	return func(T, p float64) thermo.Properties {
		s, _ := f.At(T, p)
		return s
	}
}

// The printed form does no more than it must for density, enthalpy and cp:
// three of the six sums.
func naiveLiquid(T, p float64) thermo.Properties {
	s := naive{T, p}
	rt := gasConstant * T
	tau := 1386 / T
	return thermo.Properties{
		Enthalpy: rt * tau * s.gamma1Tau(),
		Cp:       -gasConstant * tau * tau * s.gamma1TauTau(),
		Density:  16.53e6 / (rt * s.gamma1Pi()),
	}
}

func BenchmarkLiquid(b *testing.B)      { benchmark(b, of(Liquid()), 333.15, 3e5) }
func BenchmarkLiquidNaive(b *testing.B) { benchmark(b, naiveLiquid, 333.15, 3e5) }
func BenchmarkSteam(b *testing.B)       { benchmark(b, of(Steam()), 573.15, 1e6) }

func BenchmarkSaturationTemperature(b *testing.B) {
	p := 3e5
	for b.Loop() {
		sink += saturationTemperature(p)
		p += 1e-6
	}
}
