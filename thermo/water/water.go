// Package water holds liquid water and steam by IAPWS-IF97.
//
// The formulation is R7-97(2012), Revised Release on the IAPWS Industrial
// Formulation 1997 for the Thermodynamic Properties of Water and Steam, with all
// of its regions: 1 for the liquid up to 623.15 K, 2 for steam, 3 for the
// neighbourhood of the critical point, 4 for the saturation line, 5 for steam
// above 1073.15 K. Where two regions meet, they differ by up to 134 J/kg in h,
// 0.018 % in density and 0.35 % in cp.
//
// Not modelled: metastable states (water is refused below its saturation pressure
// and steam above it), wet steam, ice. Below 273.15 K water is refused at every
// pressure, though under pressure it freezes a little later. The release's
// backward equations are left out: nothing here asks for T from h.
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
