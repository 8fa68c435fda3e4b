package oil

import (
	"os"
	"testing"

	"heatreeve/thermo/fluidtest"
)

const atm = 101325.0

func rows(t *testing.T, name string) []fluidtest.Row {
	t.Helper()
	return fluidtest.Rows(t, os.DirFS("testdata"), name)
}
