// Package water holds liquid water and steam by IAPWS-IF97.
//
// The formulation is R7-97(2012), Revised Release on the IAPWS Industrial
// Formulation 1997 for the Thermodynamic Properties of Water and Steam: region 1
// for the liquid, region 2 for steam, region 4 for the saturation line between
// them. Region 3 (the neighbourhood of the critical point) and region 5 (steam
// above 1073.15 K) are left out, as are metastable states: water is refused
// below its saturation pressure and steam above it. Below 273.15 K water is
// refused at every pressure, though under pressure it freezes a little later.
//
// Density, enthalpy, internal energy, cp and cv come from one evaluation of the
// Gibbs energy and its derivatives, so they agree with each other exactly. The
// tests hold the release's own verification values, and states computed with
// the scientific formulation IAPWS-95.
package water

import (
	"math"

	"heatreeve/thermo"
)

const source = "IAPWS R7-97(2012), industrial formulation IF97"

// molarMass in kg/mol, the one R7-97 takes its gas constant from (value from memory).
const molarMass = 0.018015257

const region1MaxT = 623.15 // K, where regions 1, 2, 3 and 4 meet

// region1MaxSaturation is the saturation pressure in Pa at 623.15 K.
var region1MaxSaturation = saturationPressure(region1MaxT)

// Liquid returns liquid water: 273.15 K to 623.15 K, from the saturation
// pressure up to 100 MPa.
func Liquid() thermo.Fluid { return liquid{} }

type liquid struct{}

var liquidBounds = thermo.Bounds{MinT: lowestTemperature, MaxT: region1MaxT, MinP: lowestSaturation, MaxP: 100e6}

func (liquid) Name() string          { return "water" }
func (liquid) Source() string        { return source + ", region 1" }
func (liquid) Phase() thermo.Phase   { return thermo.Liquid }
func (liquid) Bounds() thermo.Bounds { return liquidBounds }
func (liquid) MolarMass() float64    { return molarMass }

// Uncertainty is half of the expanded uncertainties that R7-97 draws for the
// liquid: 0.2 % in cp and 0.05 % in specific volume (figures from memory). The
// largest deviations from IAPWS-95 that the tests measure are 0.12 % in cp, half
// of the states lie within 0.05 %, and 0.004 % in density.
func (liquid) Uncertainty(T, p float64) (cp, density float64) { return 0.001, 0.00025 }

// Span returns 273.15 K and the boiling point at p, but no more than 623.15 K,
// where the formulation ends. Below 611.213 Pa there is no liquid and both are
// 273.15 K.
func (liquid) Span(p float64) (lo, hi float64) {
	switch {
	case p >= region1MaxSaturation:
		return lowestTemperature, region1MaxT
	case p >= lowestSaturation:
		return lowestTemperature, saturationTemperature(p)
	}
	return lowestTemperature, lowestTemperature
}

func (l liquid) At(T, p float64) (thermo.Properties, error) {
	if err := liquidBounds.Check("water", T, p, "range of IAPWS-IF97 region 1"); err != nil {
		return thermo.Properties{}, err
	}
	if p < region1MaxSaturation {
		if s := saturationPressure(T); p < s {
			return thermo.Properties{}, &thermo.RangeError{
				Fluid: "water", Quantity: "pressure", Value: p, Bound: s, Below: true, Why: "saturation: the water boils",
			}
		}
	}
	return region1(T, p).properties(T, p), nil
}

// Steam returns superheated steam: 273.15 K to 1073.15 K, pressures above zero
// up to the saturation pressure, above 623.15 K up to the boundary with the
// near-critical region, above 863.15 K up to 100 MPa.
func Steam() thermo.Fluid { return steam{} }

type steam struct{}

var steamBounds = thermo.Bounds{MinT: lowestTemperature, MaxT: 1073.15, MinP: 0, MaxP: 100e6}

func (steam) Name() string          { return "steam" }
func (steam) Source() string        { return source + ", region 2" }
func (steam) Phase() thermo.Phase   { return thermo.Gas }
func (steam) Bounds() thermo.Bounds { return steamBounds }
func (steam) MolarMass() float64    { return molarMass }

// Uncertainty is half of the expanded uncertainties that R7-97 draws for steam
// away from the critical region: 0.5 % in cp and 0.1 % in specific volume
// (figures from memory). The largest deviations from IAPWS-95 that the tests
// measure are 0.11 % in cp and 0.01 % in density.
func (steam) Uncertainty(T, p float64) (cp, density float64) { return 0.0025, 0.0005 }

// Span returns the dew point at p and +Inf. Below 611.213 Pa the lower end is
// 273.15 K, and above 16.529 MPa, where a near-critical region lies between
// the dew point and this formulation, it is the temperature where the
// formulation begins.
func (steam) Span(p float64) (lo, hi float64) {
	switch {
	case p > region1MaxSaturation:
		return boundary23Temperature(p), math.Inf(1)
	case p > lowestSaturation:
		return saturationTemperature(p), math.Inf(1)
	}
	return lowestTemperature, math.Inf(1)
}

func (s steam) At(T, p float64) (thermo.Properties, error) {
	if err := steamBounds.Check("steam", T, p, "range of IAPWS-IF97 region 2"); err != nil {
		return thermo.Properties{}, err
	}
	if bound, why := steamLimit(T); p > bound {
		return thermo.Properties{}, &thermo.RangeError{
			Fluid: "steam", Quantity: "pressure", Value: p, Bound: bound, Why: why,
		}
	}
	return region2(T, p).properties(T, p), nil
}

// steamLimit is the highest pressure in Pa of region 2 at T in K.
func steamLimit(T float64) (p float64, why string) {
	switch {
	case T <= region1MaxT:
		return saturationPressure(T), "saturation: the steam condenses"
	case T < 863.15:
		return boundary23Pressure(T), "boundary of IAPWS-IF97 region 2 with the near-critical region 3"
	}
	return steamBounds.MaxP, "range of IAPWS-IF97 region 2"
}
