package helmholtz

import (
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

// all returns every fluid of the package.
func all(t testing.TB) []thermo.Fluid {
	t.Helper()
	out := []thermo.Fluid{Air()}
	for _, formula := range Formulas() {
		f, ok := New(formula)
		if !ok {
			t.Fatalf("New(%q): not known", formula)
		}
		out = append(out, f)
	}
	for _, formula := range Liquids() {
		f, ok := Liquid(formula)
		if !ok {
			t.Fatalf("Liquid(%q): not known", formula)
		}
		out = append(out, f)
	}
	return out
}

// within is a fluid in a smaller box.
type within struct {
	thermo.Fluid
	box thermo.Bounds
}

func (w within) Bounds() thermo.Bounds { return w.box }

func (w within) At(T, p float64) (thermo.Properties, error) {
	if err := w.box.Check(w.Name(), T, p, "the box of this test"); err != nil {
		return thermo.Properties{}, err
	}
	return w.Fluid.At(T, p)
}

// TestConformance runs the suite on every fluid. Its step of 10 mK is too long
// for cp next to the critical points of helium, hydrogen and ammonia, where cp is
// 10 to 20 times that of the dilute gas and changes within a tenth of a kelvin.
// There it runs off that corner, and TestSlope covers the whole.
func TestConformance(t *testing.T) {
	corner := map[string]thermo.Bounds{
		"helium":   {MinT: 10, MaxT: 1500, MaxP: 100e6},
		"hydrogen": {MinT: 40, MaxT: 1000, MaxP: 100e6},
		"ammonia":  {MinT: 195.49, MaxT: 725, MaxP: 9e6},
	}
	for _, f := range all(t) {
		t.Run(f.Name(), func(t *testing.T) {
			if box, ok := corner[f.Name()]; ok {
				f = within{f, box}
			}
			fluidtest.Run(t, f)
		})
	}
	t.Run("ammonia above the critical temperature", func(t *testing.T) {
		f, _ := New("NH3")
		fluidtest.Run(t, within{f, thermo.Bounds{MinT: 410, MaxT: 725, MaxP: 100e6}})
	})
}
