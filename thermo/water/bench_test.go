package water

import (
	"testing"
	"time"
	"unsafe"

	"heatreeve/thermo"
)

var sink float64

// forms are the ways to work h, cp and density of one state, of hot water as a
// district network has it and of steam from a boiler.
var forms = []struct {
	fluid string
	T, p  float64
	naive func(T, p float64) thermo.Balance
	exact thermo.Fluid
	box   [4]float64 // K, K, Pa, Pa
}{
	{"water", 333.15, 3e5, func(T, p float64) thermo.Balance { return naive1{T, p}.balance() }, Liquid(), [4]float64{273.15, 473.15, 1e5, 25e5}},
	{"steam", 573.15, 1e6, func(T, p float64) thermo.Balance { return naive2(T, p).balance() }, Steam(), [4]float64{373.15, 673.15, 1e5, 25e5}},
}

// BenchmarkBalance times the forms side by side, range checks included, and
// reports how many times as fast as the printed form each is. The printed form
// does no more than it must: three of the six sums.
func BenchmarkBalance(b *testing.B) {
	for _, f := range forms {
		var naive time.Duration // of one state
		b.Run(f.fluid+"/naive", func(b *testing.B) {
			T := f.T
			for b.Loop() {
				s := f.naive(T, f.p)
				sink += s.Enthalpy + s.Cp + s.Density
				T += 1e-9 // never the same state twice
			}
			naive = b.Elapsed() * 1000 / time.Duration(b.N)
		})
		b.Run(f.fluid+"/exact", func(b *testing.B) { timeBalance(b, thermo.BalanceOf(f.exact), f.T, f.p, naive) })
		b.Run(f.fluid+"/table", func(b *testing.B) {
			x := f.box
			timeBalance(b, thermo.BalanceOf(Tabulate(f.exact, x[0], x[1], x[2], x[3])), f.T, f.p, naive)
		})
	}
}

// timeBalance times a balance; naive is the duration of a thousand states by
// the printed form.
func timeBalance(b *testing.B, balance func(T, p float64) (thermo.Balance, error), T, p float64, naive time.Duration) {
	b.ReportAllocs()
	for b.Loop() {
		s, _ := balance(T, p)
		sink += s.Enthalpy + s.Cp + s.Density
		T += 1e-9
	}
	b.ReportMetric(float64(naive)*float64(b.N)/(1000*float64(b.Elapsed())), "naive/this")
}

func BenchmarkAt(b *testing.B) {
	for _, s := range []struct {
		name  string
		fluid thermo.Fluid
		T, p  float64
	}{
		{"region 1", Liquid(), 333.15, 3e5},
		{"region 2", Steam(), 573.15, 1e6},
		{"region 3", Steam(), 660, 25e6},
		{"region 5", Steam(), 1500, 1e6},
	} {
		b.Run(s.name, func(b *testing.B) {
			b.ReportAllocs()
			T := s.T
			for b.Loop() {
				p, _ := s.fluid.At(T, s.p)
				sink += p.Enthalpy + p.Cv
				T += 1e-9
			}
		})
	}
}

func BenchmarkSaturationTemperature(b *testing.B) {
	p := 3e5
	for b.Loop() {
		sink += saturationTemperature(p)
		p += 1e-6
	}
}

func BenchmarkTabulate(b *testing.B) {
	for _, f := range forms {
		b.Run(f.fluid, func(b *testing.B) {
			var t thermo.Fluid
			for b.Loop() {
				x := f.box
				t = Tabulate(f.exact, x[0], x[1], x[2], x[3])
			}
			b.ReportMetric(float64(bytesOf(t)), "B/table")
		})
	}
}

// bytesOf is what a table holds.
func bytesOf(f thermo.Fluid) (n int) {
	switch t := f.(type) {
	case *liquidTable:
		n = len(t.columns) * int(unsafe.Sizeof(t.columns[0]))
		for _, c := range t.columns {
			n += len(c.cells) * int(unsafe.Sizeof(liquidCell{}))
		}
	case *steamTable:
		n = len(t.columns) * int(unsafe.Sizeof(t.columns[0]))
		for _, c := range t.columns {
			n += len(c.cells) * int(unsafe.Sizeof(steamCell{}))
		}
	}
	return n
}
