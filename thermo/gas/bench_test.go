package gas

import (
	"testing"

	"heatreeve/thermo/fluidtest"
)

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
			fluidtest.PerState(b, bb.T, func(T float64) float64 {
				s, _ := f.At(T, bb.p)
				return s.Enthalpy + s.Density + s.Cp + s.Cv
			})
		})
		b.Run(bb.name+" "+bb.model.String()+" naive", func(b *testing.B) {
			fluidtest.PerState(b, bb.T, func(T float64) float64 {
				h, cp, cv, rho := n.at(T, bb.p)
				return h + rho + cp + cv
			})
		})
	}
}
