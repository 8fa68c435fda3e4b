package water

import (
	"math"

	"heatreeve/thermo"
)

// Uncertainty joins two parts. One is half of the expanded uncertainty that R7-97
// draws: 0.2 % in cp and 0.05 % in specific volume of the liquid, 0.5 % and 0.1 %
// of steam (figures from memory). The other is the deviation from IAPWS-95, which
// R7-97 was fitted to, as half the width of a rectangle; it is the greater one
// near the critical point, where it rises with cp.
func (liquid) Uncertainty(T, p float64) (cp, density float64) {
	return uncertainty(T, p, thermo.Liquid)
}

// Uncertainty is that of water, with the figures of steam.
func (steam) Uncertainty(T, p float64) (cp, density float64) {
	return uncertainty(T, p, thermo.Gas)
}

func uncertainty(T, p float64, phase thermo.Phase) (cp, density float64) {
	cp, density = 0.0025, 0.0005
	if T <= region1MaxT && phase == thermo.Liquid {
		cp, density = 0.001, 0.00025
	}
	dcp, ddensity := deviation(T, p, phase)
	return math.Hypot(cp, dcp/math.Sqrt(3)), math.Hypot(density, ddensity/math.Sqrt(3))
}

// deviation is how far cp and density may lie from IAPWS-95, as fractions: the
// largest deviations found at random states, rounded up, by region.
func deviation(T, p float64, phase thermo.Phase) (cp, density float64) {
	r := region(T, p)
	if r == 4 {
		r = beside(T, phase)
	}
	switch r {
	case 1:
		return 0.0008 + 0.0007*min(max((T-300)/200, 0), 1), 5e-5
	case 2:
		return rising(p, 0.0022, 0.0065), rising(p, 1.3e-4, 5e-4)
	case 5:
		return 0.0012, 1.2e-4
	}
	s, ok := region3(T, p, phase)
	if !ok {
		return 0.4, 0.1
	}
	return min(0.0035+1.7e-6*max(s.Cp-7000, 0), 0.4), min(1.5e-7*s.Cp, 0.1)
}

// rising is the figure low up to 3 MPa, and high from 12 MPa on.
func rising(p, low, high float64) float64 {
	return low + (high-low)*min(max((p-3e6)/9e6, 0), 1)
}
