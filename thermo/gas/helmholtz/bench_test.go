package helmholtz

import (
	"fmt"
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

func states(b *testing.B, at func(f *fluid) func(T, p float64) thermo.Properties) {
	for _, c := range []struct {
		formula string
		T, p    float64
	}{
		{"N2", 300, 1e6}, {"dry-air", 320, 8e5}, {"CO2", 320, 2e6}, {"CO2", 310, 8e6},
		{"H2", 300, 3e7}, {"He", 300, 2e6}, {"C3H8", 300, 5e5}, {"NH3", 320, 1e6},
	} {
		b.Run(fmt.Sprintf("%s/%gK/%gMPa", c.formula, c.T, c.p/1e6), func(b *testing.B) {
			f, ok := New(c.formula)
			if !ok {
				f = Air()
			}
			benchmark(b, at(f.(*fluid)), c.T, c.p)
		})
	}
}

func BenchmarkGas(b *testing.B) {
	states(b, func(f *fluid) func(T, p float64) thermo.Properties {
		return func(T, p float64) thermo.Properties {
			s, _ := f.At(T, p)
			return s
		}
	})
}

func BenchmarkGasNaive(b *testing.B) {
	states(b, func(f *fluid) func(T, p float64) thermo.Properties {
		return func(T, p float64) thermo.Properties { return naiveState(f, T, p) }
	})
}

func BenchmarkLiquid(b *testing.B) {
	for _, formula := range []string{"NH3", "CO2", "C3H8"} {
		b.Run(formula, func(b *testing.B) {
			f, _ := Liquid(formula)
			benchmark(b, func(T, p float64) thermo.Properties {
				s, _ := f.At(T, p)
				return s
			}, 270, 4e6)
		})
	}
}

func BenchmarkDewPoint(b *testing.B) {
	f, _ := New("CO2")
	p := 2e6
	for b.Loop() {
		lo, _ := f.Span(p)
		sink += lo
		p += 1e-6
	}
}
