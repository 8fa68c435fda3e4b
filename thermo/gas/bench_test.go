package gas

import "testing"

var sink float64

// BenchmarkState is one state of a flue gas at 1 atm and of a natural gas at 60 bar: h, cp, cv and
// density together; and the same equations as they are printed.
func BenchmarkState(b *testing.B) {
	for _, bb := range []struct {
		name  string
		model Model
		T, p  float64
	}{
		{"flue gas", Ideal, 523.15, 101325},
		{"natural gas", PengRobinson, 293.15, 6e6},
	} {
		c, err := compose(mixtures[bb.name], "mole fraction")
		if err != nil {
			b.Fatal(err)
		}
		f, n := mustNew(b, mixtures[bb.name], bb.model), naive{c.parts, bb.model == PengRobinson}
		b.Run(bb.name+" "+bb.model.String(), func(b *testing.B) {
			T := bb.T
			perState(b, func() float64 {
				T += 1e-9 // never the same state twice
				s, _ := f.At(T, bb.p)
				return s.Enthalpy + s.Density + s.Cp + s.Cv
			})
		})
		b.Run(bb.name+" "+bb.model.String()+" naive", func(b *testing.B) {
			T := bb.T
			perState(b, func() float64 {
				T += 1e-9
				h, cp, cv, rho := n.at(T, bb.p)
				return h + rho + cp + cv
			})
		})
	}
}

func perState(b *testing.B, state func() float64) {
	b.ReportAllocs()
	for b.Loop() {
		sink += state()
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/state")
}
