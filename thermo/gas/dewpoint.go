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
}

// vapours of a mixture, with the dew points up to some pressures, so that most states need none.
type vapours struct {
	all  []vapour
	safe [3]struct{ p, T float64 } // no dew point lies above T up to p
}

// vapoursOf are the parts that fall out of the gas above 200 K at some pressure up to
// maxP in Pa.
func vapoursOf(parts []component, maxP float64) vapours {
	var vs vapours
	for _, c := range parts {
		v := vapour{c.formula, c.share, critical[c.formula]}
		if v.dewPoint(maxP) > minT {
			vs.all = append(vs.all, v)
		}
	}
	for k, p := range [...]float64{min(120e3, maxP), min(1e6, maxP), maxP} {
		vs.safe[k].p = p
		vs.safe[k].T, _ = vs.dewPoint(p)
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

// dewPoint returns the highest dew point at p in Pa and whose it is, 0 where there is none.
func (vs *vapours) dewPoint(p float64) (T float64, formula string) {
	if !(p > 0) {
		return 0, ""
	}
	for k := range vs.all {
		if d := vs.all[k].dewPoint(p); d > T {
			T, formula = d, vs.all[k].formula
		}
	}
	return T, formula
}

// dewPoint is the temperature in K at which the component falls out of a mixture
// at the absolute pressure p in Pa, as if its partial pressure were that of the
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
