package water

import "heatreeve/thermo"

// Corners of the regions of IF97: R7-97(2012), figure 1.
const (
	region1MaxT   = 623.15  // K, where regions 1, 2, 3 and 4 meet
	boundary23Top = 863.15  // K, where the boundary of regions 2 and 3 meets 100 MPa
	region2MaxT   = 1073.15 // K
	region5MaxT   = 2273.15 // K
	region5MaxP   = 50e6    // Pa
	highestP      = 100e6   // Pa
)

// region returns the region of IF97 that a state within the ranges of the
// release belongs to; 4 is the saturation line itself.
func region(T, p float64) int {
	switch {
	case T <= region1MaxT:
		switch s := saturationPressure(T); {
		case p > s:
			return 1
		case p == s:
			return 4
		}
		return 2
	case T > region2MaxT:
		return 5
	case T >= boundary23Top || p <= boundary23Pressure(T):
		return 2
	case T <= criticalTemperature && p == saturationPressure(T):
		return 4
	}
	return 3
}

// at evaluates a state that a fluid of the given phase has accepted.
func at(T, p float64, phase thermo.Phase) (thermo.Properties, error) {
	r := region(T, p)
	if r == 4 {
		r = beside(T, phase)
	}
	switch r {
	case 1:
		return region1All(T, p), nil
	case 2:
		return region2All(T, p), nil
	case 5:
		return region5(T, p), nil
	}
	s, ok := region3(T, p, phase)
	if !ok {
		return s, atCriticalPoint(T, phase)
	}
	return s, nil
}

// beside returns the region that a phase at saturation belongs to.
func beside(T float64, phase thermo.Phase) int {
	switch {
	case T > region1MaxT:
		return 3
	case phase == thermo.Liquid:
		return 1
	}
	return 2
}

// Pressures that spare the saturation equation: of the steps of 1 K that begin
// at 273.15 K, those from which on every state is in region 1, and those up to
// which every state is in region 2.
var surely1, surely2 = func() (above [350]float64, below [800]float64) {
	const margin = 1e-9 // for the rounding of a temperature near the end of its step
	for k := range above {
		above[k] = saturationPressure(lowestTemperature+float64(k+1)) * (1 + margin)
	}
	for k := range below {
		switch T := lowestTemperature + float64(k); {
		case T < region1MaxT:
			below[k] = saturationPressure(T) * (1 - margin)
		case T < boundary23Top+0.5:
			below[k] = boundary23Pressure(T) * (1 - margin)
		default:
			below[k] = highestP
		}
	}
	return above, below
}()

// isSurely1 tells in little time that a state is in region 1; where it does not
// tell so, the state may still be.
func isSurely1(T, p float64) bool {
	if !(T >= lowestTemperature && p <= highestP) {
		return false
	}
	k := uint(T - lowestTemperature)
	return k < uint(len(surely1)) && p >= surely1[k]
}

// isSurely2 is isSurely1 for region 2.
func isSurely2(T, p float64) bool {
	if !(T >= lowestTemperature && p > 0) {
		return false
	}
	k := uint(T - lowestTemperature)
	return k < uint(len(surely2)) && p <= surely2[k]
}
