package named

import (
	"testing"

	"heatreeve/thermo/fluidtest"
)

// Whatever has a name keeps the contract of a fluid over the whole of its range.
func TestEveryNameKeepsTheContract(t *testing.T) {
	for _, e := range List() {
		t.Run(e.Example, func(t *testing.T) {
			f, err := Lookup(e.Example)
			if err != nil {
				t.Fatal(err)
			}
			fluidtest.Run(t, f)
		})
	}
}
