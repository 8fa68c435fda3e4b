package gas

import (
	"math"

	"heatreeve/thermo/water"
)

// vapour is a component that may condense or freeze out of a mixture within the
// mixture's range.
type vapour struct {
	formula string
	share   float64 // mole fraction
}

// condenses tells whether the component has a dew point in the table; the
// others stay gases down to 200 K at every pressure allowed here.
func (v vapour) condenses() bool {
	_, known := critical[v.formula]
	return known || v.formula == "H2O" || v.formula == "CO2"
}

// dewPoint is the temperature in K at which the component falls out of a mixture
// at the absolute pressure p in Pa, as if its partial pressure were that of the
// pure substance: Raoult and Dalton, without dissolved or real gas.
func (v vapour) dewPoint(p float64) float64 {
	part := v.share * p
	switch v.formula {
	case "H2O":
		return waterDewPoint(part)
	case "CO2":
		return clapeyron(part, 216.592, 517950, 3142)
	}
	return correspondingStates(part, critical[v.formula])
}

// waterDewPoint is exact to IAPWS-IF97 above freezing. Below, it is the frost
// point, within 0.03 K of IAPWS R14-08 down to 200 K.
func waterDewPoint(p float64) float64 {
	if p < 611.657 {
		return clapeyron(p, 273.16, 611.657, 6147)
	}
	T, err := water.SaturationTemperature(p)
	if err != nil {
		return 647.096 // above the critical pressure: the critical temperature
	}
	return T
}

// clapeyron is a sublimation line with a constant heat of sublimation:
// ln(p/p3) = slope · (1/T3 − 1/T), from the triple point T3, p3. The slope for
// ice is fitted to IAPWS R14-08; that for carbon dioxide runs through its
// sublimation point at 1 atm, 194.686 K (triple point and this from memory of
// Span and Wagner 1996).
func clapeyron(p, T3, p3, slope float64) float64 {
	return 1 / (1/T3 - math.Log(p/p3)/slope)
}

// criticalPoint of a species: temperature in K, pressure in Pa, acentric factor.
type criticalPoint struct{ T, p, omega float64 }

// critical points by the reference equations of state: Lemmon, McLinden and Wagner (2009)
// for propane, Bücker and Wagner (2006) for ethane, Gao et al. (2020) for
// ammonia, Gao et al. (2016) for sulfur dioxide.
var critical = map[string]criticalPoint{
	"C2H6": {305.322, 4872200, 0.099},
	"C3H8": {369.89, 4251200, 0.1521},
	"NH3":  {405.56, 11363390, 0.25569},
	"SO2":  {430.64, 7886588, 0.25613},
}

// correspondingStates draws log p over 1/T as the straight line through the critical
// point and the point that defines the acentric factor, Tr = 0.7: within 1.5 K
// at atmospheric pressure.
func correspondingStates(p float64, c criticalPoint) float64 {
	x := math.Log10(p/c.p) / (7.0 / 3 * (1 + c.omega))
	return c.T / (1 - x)
}
