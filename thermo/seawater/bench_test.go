package seawater

import (
	"testing"

	"heatreeve/thermo/fluidtest"
)

func BenchmarkSeawater(b *testing.B) { fluidtest.PerProperties(b, mustNew(b, 0.035), 293.15, 3e5) }
func BenchmarkSeawaterNaive(b *testing.B) {
	fluidtest.PerProperties(b, fluidtest.Form(naive(0.035)), 293.15, 3e5)
}
