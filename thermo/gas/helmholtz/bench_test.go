package helmholtz

import (
	"fmt"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

var sink float64

func states(b *testing.B, at func(f *fluid) fluidtest.Form) {
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
			fluidtest.PerProperties(b, at(f.(*fluid)), c.T, c.p)
		})
	}
}

func BenchmarkGas(b *testing.B) {
	states(b, func(f *fluid) fluidtest.Form { return f.At })
}

func BenchmarkGasNaive(b *testing.B) {
	states(b, func(f *fluid) fluidtest.Form {
		return func(T, p float64) (thermo.Properties, error) { return naiveState(f, T, p), nil }
	})
}

func BenchmarkLiquid(b *testing.B) {
	for _, formula := range []string{"NH3", "CO2", "C3H8"} {
		b.Run(formula, func(b *testing.B) {
			f, _ := Liquid(formula)
			fluidtest.PerProperties(b, f, 270, 4e6)
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
