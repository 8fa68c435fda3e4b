package oil

import (
	"os"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

const atm = 101325.0

func must(t testing.TB) func(thermo.Fluid, error) thermo.Fluid {
	return func(f thermo.Fluid, err error) thermo.Fluid {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
		return f
	}
}

func rows(t *testing.T, name string) []fluidtest.Row {
	t.Helper()
	return fluidtest.Rows(t, os.DirFS("testdata"), name)
}
