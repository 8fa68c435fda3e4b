// Package water holds liquid water and steam by IAPWS-IF97.
//
// The formulation is R7-97(2012), Revised Release on the IAPWS Industrial
// Formulation 1997 for the Thermodynamic Properties of Water and Steam, with all
// of its regions:
//
//	1  liquid, to 623.15 K and 100 MPa
//	2  steam, to 1073.15 K and 100 MPa
//	3  around the critical point, above 623.15 K; solved for the density
//	4  the saturation line, 273.15 K to 647.096 K
//	5  steam, to 2273.15 K and 50 MPa
//
// Every value that the release prints for checking is met to 3.2e-9, which is
// its rounding. Where regions meet they differ, as the release allows, by up to
// 134 J/kg in h, 0.018 % in density and 0.35 % in cp. The largest deviations from
// IAPWS-95, the scientific formulation, found at 15 000 random states, half of them
// by the saturation line or the critical point, are
//
//	region  cp       cv       density   h
//	1       0.14 %   0.5 %    0.004 %   0.24 kJ/kg
//	2       0.6 %    0.8 %    0.04 %    0.4 kJ/kg
//	3       23 %     16 %     3 %       17 kJ/kg
//	5       0.1 %    0.13 %   0.01 %    0.33 kJ/kg
//
// in region 2 next to saturation, in region 3 beside the critical point; where cp
// is below 10 kJ/(kg K), region 3 is within 0.4 % in cp and 0.04 % in density.
//
// Not modelled: metastable states (water is refused below its saturation pressure
// and steam above it), wet steam, ice. Below 273.15 K water is refused at every
// pressure, though under pressure it freezes a little later. The release's
// backward equations are left out: nothing here asks for T from h.
//
// Balances are worked in straight lines of shared powers, in a 67th (water) and a
// 37th (steam) of the time of the equations as printed, with math.Pow; where one
// fluid is asked for tens of thousands of them, those of [Tabulate] take a 225th
// and a 172nd.
package water

import (
	"math"

	"heatreeve/thermo"
)

const source = "IAPWS R7-97(2012), industrial formulation IF97"

// molarMass in kg/mol, the one R7-97 takes its gas constant from (value from memory).
const molarMass = 0.018015257

// Liquid returns water as a liquid: 273.15 K to the boiling point, up to 100 MPa.
// Above the critical pressure of 22.064 MPa nothing boils, and it goes on up to
// 1073.15 K as the one fluid that a supercritical once-through boiler heats.
func Liquid() thermo.Fluid { return liquid{} }

type liquid struct{}

var liquidBounds = thermo.Bounds{MinT: lowestTemperature, MaxT: region2MaxT, MinP: lowestSaturation, MaxP: highestP}

func (liquid) Name() string          { return "water" }
func (liquid) Source() string        { return source + ", regions 1 to 3" }
func (liquid) Phase() thermo.Phase   { return thermo.Liquid }
func (liquid) Bounds() thermo.Bounds { return liquidBounds }
func (liquid) MolarMass() float64    { return molarMass }

// Span returns 273.15 K and the boiling point at p, which is +Inf above the
// critical pressure. Below 611.213 Pa there is no liquid and both are 273.15 K.
func (liquid) Span(p float64) (lo, hi float64) {
	switch {
	case p > criticalPressure:
		return lowestTemperature, math.Inf(1)
	case p >= lowestSaturation:
		return lowestTemperature, saturationTemperature(p)
	}
	return lowestTemperature, lowestTemperature
}

func (liquid) At(T, p float64) (thermo.Properties, error) {
	if isSurely1(T, p) {
		return region1All(T, p), nil
	}
	if err := liquidRefusal(T, p); err != nil {
		return thermo.Properties{}, err
	}
	return at(T, p, thermo.Liquid)
}

// Balance returns the part of [thermo.Fluid.At] that a heat balance needs.
func (f liquid) Balance(T, p float64) (thermo.Balance, error) {
	if isSurely1(T, p) {
		return region1(T, p), nil
	}
	return part(f.At(T, p))
}

// Steam returns superheated steam: 273.15 K to 1073.15 K, pressures above zero
// up to saturation, from the critical temperature of 647.096 K on up to 100 MPa;
// above 1073.15 K to 2273.15 K and 50 MPa.
func Steam() thermo.Fluid { return steam{} }

type steam struct{}

var steamBounds = thermo.Bounds{MinT: lowestTemperature, MaxT: region5MaxT, MinP: 0, MaxP: highestP}

func (steam) Name() string          { return "steam" }
func (steam) Source() string        { return source + ", regions 2, 3 and 5" }
func (steam) Phase() thermo.Phase   { return thermo.Gas }
func (steam) Bounds() thermo.Bounds { return steamBounds }
func (steam) MolarMass() float64    { return molarMass }

// Span returns the dew point at p, which above the critical pressure is the
// critical temperature, and below 611.213 Pa 273.15 K. Above it has no limit but
// that of the formulation, which ends at 1073.15 K above 50 MPa.
func (steam) Span(p float64) (lo, hi float64) {
	lo, hi = lowestTemperature, math.Inf(1)
	switch {
	case p > criticalPressure:
		lo = criticalTemperature
	case p > lowestSaturation:
		lo = saturationTemperature(p)
	}
	if p > region5MaxP {
		hi = region2MaxT
	}
	return lo, hi
}

func (steam) At(T, p float64) (thermo.Properties, error) {
	if isSurely2(T, p) {
		return region2All(T, p), nil
	}
	if err := steamRefusal(T, p); err != nil {
		return thermo.Properties{}, err
	}
	return at(T, p, thermo.Gas)
}

// Balance returns the part of [thermo.Fluid.At] that a heat balance needs.
func (f steam) Balance(T, p float64) (thermo.Balance, error) {
	if isSurely2(T, p) {
		return region2(T, p), nil
	}
	return part(f.At(T, p))
}

func part(s thermo.Properties, err error) (thermo.Balance, error) {
	return thermo.Balance{Enthalpy: s.Enthalpy, Cp: s.Cp, Density: s.Density}, err
}
