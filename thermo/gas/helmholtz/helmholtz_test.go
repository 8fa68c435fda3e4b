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

func TestConformance(t *testing.T) {
	for _, f := range all(t) {
		t.Run(f.Name(), func(t *testing.T) { fluidtest.Run(t, f) })
	}
}
