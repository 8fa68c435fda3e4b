package oil

import "math"

// boiling is the vapour pressure of a cut by its specific gravity and Watson factor, as if
// it were one substance: that of B. I. Lee, M. G. Kesler, AIChE Journal 21 (1975) 510-527,
//
//	ln(p/pc) = f0(T/Tc) + ω f1(T/Tc)
//
// with the acentric factor ω that puts it through one atmosphere at the mean average
// boiling point, and the critical point of Kesler and Lee (1976); all from memory. Within 3
// % of the vapour pressures of n-hexane and n-decane from 20 °C to 100 °C.
type boiling struct {
	tc    float64 // K
	pc    float64 // Pa
	omega float64
}

// boilingMargin in K is what a cut is taken to boil before one substance of its mean
// boiling point does (common practice, no source). Its light ends may have it boil earlier
// still: a gasoline of the whole range some 60 K, and a crude oil with gas in it anywhere.
const boilingMargin = 30.0

func newBoiling(sg, kw float64) *boiling {
	tb := boilingPoint(sg, kw)
	b := &boiling{tc: criticalTemperature(sg, kw), pc: criticalPressure(sg, kw)}
	f0, f1 := leeKesler(tb / b.tc)
	b.omega = (math.Log(101325/b.pc) - f0) / f1
	return b
}

// pressure is the vapour pressure in Pa at T in K, up to the critical point.
func (b *boiling) pressure(T float64) float64 {
	f0, f1 := leeKesler(T / b.tc)
	return b.pc * math.Exp(f0+b.omega*f1)
}

// temperature is the boiling point in K at p in Pa, at most the critical temperature.
func (b *boiling) temperature(p float64) float64 {
	lo, hi := 0.2*b.tc, b.tc
	for range 60 {
		if T := (lo + hi) / 2; b.pressure(T) < p {
			lo = T
		} else {
			hi = T
		}
	}
	return hi
}

func leeKesler(reduced float64) (f0, f1 float64) {
	inverse, log, six := 1/reduced, math.Log(reduced), reduced*reduced*reduced
	six *= six
	return 5.92714 - 6.09648*inverse - 1.28862*log + 0.169347*six,
		15.2518 - 15.6875*inverse - 13.4721*log + 0.43577*six
}
