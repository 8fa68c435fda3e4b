package gas

import (
	"math"

	"heatreeve/thermo/water"
)

// vapour is a component that may condense, freeze out or pair within the range
// of a mixture.
type vapour struct {
	formula string
	share   float64 // mole fraction
	point   criticalPoint
	mixes   bool
	line    vapourLine
}

// vapours of a mixture, with the dew points up to some pressures, so that most states need none.
type vapours struct {
	all  []vapour
	safe [5]struct{ p, T float64 } // no dew point lies above T up to p
}

// vapoursOf are the parts that fall out of the gas above 200 K at some pressure up to
// maxP in Pa.
func vapoursOf(parts []component, maxP float64) vapours {
	var vs vapours
	for _, c := range parts {
		v := vapour{formula: c.formula, share: c.share, point: critical[c.formula], mixes: !polar[c.formula]}
		v.line = v.point.line(v.share)
		if v.dewPoint(maxP) > minT {
			vs.all = append(vs.all, v)
		}
	}
	for k, p := range [...]float64{120e3, 500e3, 2e6, 5e6, maxP} {
		vs.safe[k].p = min(p, maxP)
		vs.safe[k].T, _ = vs.dewPoint(vs.safe[k].p)
	}
	return vs
}

// clear tells that T in K surely lies above the dew point at p in Pa.
func (vs *vapours) clear(T, p float64) bool {
	for k := range vs.safe {
		if s := &vs.safe[k]; p <= s.p {
			return T >= s.T
		}
	}
	return false
}

// dry tells that T in K lies above the dew point at p in Pa, but for a hair; in less time than it
// takes to find that.
func (vs *vapours) dry(T, p float64) bool {
	y, logP, sum := 1/T, math.Log(p), 0.0
	for k := range vs.all {
		v := &vs.all[k]
		if !v.mixes || v.formula == "CO2" {
			if T < v.dewPoint(p) {
				return false
			}
		}
		if v.mixes {
			sum += v.line.ratio(logP, y)
		}
	}
	return sum < 1-1e-12
}

// dewPoint returns the highest dew point at p in Pa and whose it is, 0 where there is none: of each
// component by itself, and of those that mix with one another, together.
func (vs *vapours) dewPoint(p float64) (T float64, formula string) {
	if !(p > 0) {
		return 0, ""
	}
	highest := 0.0 // of those that mix
	for k := range vs.all {
		v := &vs.all[k]
		d := v.dewPoint(p)
		if d > T {
			T, formula = d, v.formula
		}
		if v.mixes {
			highest = max(highest, v.point.vapourTemperature(v.share*p))
		}
	}
	if d, first := vs.together(p, highest); d > T {
		return d, first
	}
	return T, formula
}

// together is the temperature in K at which a liquid of all components that mix begins,
//
//	Σ x p/ps(T) = 1
//
// by Raoult, with the vapour pressures ps of the straight lines in 1/T, which run on above the
// critical points; and the component of which most is in that liquid. start in K is the highest of
// the components' own dew points. The logarithm of the sum is convex in 1/T, so Newton's steps
// from there fall one way to the root.
func (vs *vapours) together(p, start float64) (T float64, formula string) {
	if start == 0 {
		return 0, ""
	}
	y, logP := 1/start, math.Log(p)
	for range 50 {
		var sum, slope, most float64
		for k := range vs.all {
			v := &vs.all[k]
			if !v.mixes {
				continue
			}
			liquid := v.line.ratio(logP, y)
			sum += liquid
			slope += liquid * v.line.slope
			if liquid > most {
				most, formula = liquid, v.formula
			}
		}
		next := y - math.Log(sum)*sum/slope
		if !(next < y*(1-1e-15)) {
			break
		}
		y = next
	}
	return 1 / y, formula
}

// dewPoint is the temperature in K at which the component falls out of a mixture
// at the absolute pressure p in Pa by itself, as if its partial pressure were that of the
// pure substance: Raoult and Dalton, without dissolved or real gas.
func (v *vapour) dewPoint(p float64) float64 {
	part := v.share * p
	switch v.formula {
	case "H2O":
		return waterDewPoint(part)
	case "CO2":
		if part < snow.p {
			return snow.temperature(part)
		}
	case "NO2":
		return max(v.point.vapourTemperature(part), pairing(v.share*part))
	}
	return v.point.vapourTemperature(part)
}

// waterDewPoint is exact to IAPWS-IF97 above freezing. Below, it is the frost
// point, within 0.03 K of IAPWS R14-08 down to 200 K.
func waterDewPoint(p float64) float64 {
	if p < ice.p {
		return ice.temperature(p)
	}
	T, err := water.SaturationTemperature(p)
	if err != nil {
		return 647.096 // above the critical pressure: the critical temperature
	}
	return T
}

// sublimation is a line with a constant heat of sublimation from the triple point T, p:
// ln(p/p3) = slope · (1/T3 − 1/T).
type sublimation struct{ T, p, slope float64 }

// The slope for ice is fitted to IAPWS R14-08; that for carbon dioxide runs
// through its sublimation point at 1 atm, 194.686 K (triple point and this from
// memory of Span and Wagner 1996).
var (
	ice  = sublimation{273.16, 611.657, 6147}
	snow = sublimation{216.592, 517950, 3142}
)

func (s sublimation) temperature(p float64) float64 {
	return 1 / (1/s.T - math.Log(p/s.p)/s.slope)
}

// The reaction N2O4 ⇌ 2 NO2: −ΔH/R in K and ΔS/R, at 298 K and 1 bar (NIST-JANAF, from
// memory: 57.12 kJ/mol and 175.7 J/(mol K)).
const (
	pairHeat    = 6870
	pairEntropy = 21.13
)

// pairing is the temperature in K below which the pairing of nitrogen dioxide
// adds more than 1 % to the heat capacity of a gas with cp = 4 R. At equilibrium x² p/K
// moles of N2O4 stand in a mole of gas, each kelvin frees ΔH/(RT²) of them, and with y =
// ΔH/(RT)
//
//	x² p/K · y² = 0.01 · 4,   ln K = ΔS/R − y
//
// xxp is x² p in Pa.
func pairing(xxp float64) float64 {
	c := pairEntropy - math.Log(xxp/1e5/0.04)
	y := 10.0
	for range 12 {
		y = c - 2*math.Log(y)
		if y < 3.5 {
			return pairHeat / 3.5 // hotter than the molecule bears
		}
	}
	return pairHeat / y
}
