package air

import (
	"math"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

const benchRatio = 0.01

// naive works everything per state as the handbook prints it: per kilogram of dry air, then
// divided, with the dew point solved to tell whether the air is wet.
func naive(T, p float64) (thermo.Properties, error) {
	const w = benchRatio
	if naiveDewPoint(p*w/(massRatio+w)) > T {
		return thermo.Properties{}, &thermo.RangeError{}
	}
	t := T - zero
	h := (1006*t + w*(2501000+1860*t)) / (1 + w)
	rho := (1 + w) / (gasConstant * T * (1 + lightness*w) / p)
	return thermo.Properties{Enthalpy: h, InternalEnergy: h - p/rho, Cp: (1006 + 1860*w) / (1 + w), Density: rho}, nil
}

// naiveDewPoint halves the range with the equation over water as it is printed.
func naiveDewPoint(pw float64) float64 {
	lo, hi, c := zero, hottest, overWater
	for hi-lo > 1e-3 {
		T := (lo + hi) / 2
		if math.Exp(c[0]/T+c[1]+c[2]*T+c[3]*math.Pow(T, 2)+c[4]*math.Pow(T, 3)+c[6]*math.Log(T)) < pw {
			lo = T
		} else {
			hi = T
		}
	}
	return hi
}

var sink float64

func BenchmarkMoist(b *testing.B) {
	fluidtest.PerProperties(b, mustMoist(b, benchRatio), 295.15, thermo.Atmosphere)
}
func BenchmarkMoistNaive(b *testing.B) {
	fluidtest.PerProperties(b, fluidtest.Form(naive), 295.15, thermo.Atmosphere)
}

// BenchmarkCarrying is the step from a humidity reading to its air.
func BenchmarkCarrying(b *testing.B) {
	f := Live()
	b.ReportAllocs()
	rh := 0.4
	for b.Loop() {
		m, _ := f.Carrying(thermo.Moisture{Kind: thermo.RelativeHumidity, Value: rh}, 298.15, 101325)
		s, _ := m.Sensible(298.15, 101325)
		sink += s.Enthalpy
		rh += 1e-12
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/reading")
}

func BenchmarkWetBulb(b *testing.B) {
	w := 0.008
	for b.Loop() {
		T, _ := WetBulb(w, 298.15, 101325)
		sink += T
		w += 1e-15
	}
}
