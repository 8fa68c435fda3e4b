package signal

import (
	"math"

	"heatreeve/ingest/quality"
)

// The coefficients of the Callendar-Van Dusen equation in IEC 60751:2008, of the ratio of
// the resistance at t in °C to that at 0 °C:
//
//	W(t) = 1 + A·t + B·t²                   from 0 to 850 °C
//	W(t) = 1 + A·t + B·t² + C·(t − 100)·t³  from -200 to 0 °C
const (
	cvdA = 3.9083e-3
	cvdB = -5.775e-7
	cvdC = -4.183e-12
)

const (
	coldest, hottest = -200.0, 850.0 // °C, the ends of the standard's table
	iceKelvin        = 273.15
)

var leastRatio, greatestRatio = ratio(coldest), ratio(hottest)

// ratio is W(t).
func ratio(t float64) float64 {
	w := 1 + t*(cvdA+t*cvdB)
	if t < 0 {
		w += cvdC * (t - 100) * t * t * t
	}
	return w
}

// Resistance is a platinum thermometer by its resistance in ohms, of the standard's curve
// (IEC 60751). A resistance that no temperature from -200 to 850 °C has is a failure: a wire
// is broken, or two touch.
type Resistance struct {
	R0   float64 // ohm at 0 °C: 100 of a Pt100
	Lead float64 // ohm, of the leads to and from a thermometer on two wires
}

// Convert returns the temperature in K at so many ohms; NaN of a failure. Above 0 °C the
// equation is solved in closed form, below by Newton's method, from there on.
func (r Resistance) Convert(ohm float64) (float64, quality.Mark) {
	w := (ohm - r.Lead) / r.R0
	if !(w >= leastRatio && w <= greatestRatio) {
		return math.NaN(), quality.Failed
	}
	t := (-cvdA + math.Sqrt(cvdA*cvdA-4*cvdB*(1-w))) / (2 * cvdB)
	if t < 0 {
		t = newton(t, w)
	}
	return t + iceKelvin, quality.None
}

// steps is how many of Newton's are made at most; from the closed form, which is off by
// 2.4 K at -200 °C, three reach the last bits.
const steps = 8

// newton solves W(t) = w below 0 °C.
func newton(t, w float64) float64 {
	for range steps {
		slope := cvdA + t*(2*cvdB+cvdC*t*(4*t-300))
		d := (ratio(t) - w) / slope
		t -= d
		if math.Abs(d) < 1e-10 {
			break
		}
	}
	return t
}
