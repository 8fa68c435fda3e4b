package solid

import (
	"math"
	"testing"

	"heatreeve/thermo/fluidtest"
)

func BenchmarkCarbonSteel(b *testing.B) {
	fluidtest.PerProperties(b, mustNew(b, "carbon steel"), 633, atm)
}

// The same equation term by term, with math.Pow.
func BenchmarkCarbonSteelNaive(b *testing.B) {
	c := carbonSteel{}.make()
	fluidtest.PerState(b, 633, func(T float64) float64 {
		var h, cp float64
		for k, v := range c.cp {
			cp += v * math.Pow(T-273.15, float64(k))
			h += v * math.Pow(T-273.15, float64(k+1)) / float64(k+1)
		}
		return h + cp + c.density
	})
}
