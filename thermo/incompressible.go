package thermo

import "math"

// Atmosphere is the standard atmosphere in Pa, where the pressure term of an
// [Incompressible] is zero.
const Atmosphere = 101325.0

// PressureLaw tells how the enthalpy of a fluid follows pressure at constant temperature.
// The zero value is the law of thermodynamics, (∂h/∂p)T = v − T (∂v/∂T)p at every state.
type PressureLaw struct {
	// Fixed in K is the one temperature at which the right side is taken, for a fluid whose
	// density does not depend on pressure; 0 where it is taken at every state.
	Fixed float64
	// Spread in m³/kg is how far the right side is at most, within the range, from the one
	// that is fixed: by so much times a change of pressure an enthalpy difference is off.
	Spread float64
	// Ideal is that of a gas whose enthalpy does not depend on pressure, whatever its
	// density makes of the right side.
	Ideal bool
	// Within is how far the two sides may be apart, as a fraction of v.
	Within float64
}

// Compressed is a fluid that says which law it keeps. One that does not keeps that of
// thermodynamics.
type Compressed interface {
	Fluid
	PressureLaw() PressureLaw
}

// Incompressible is what a liquid or solid has beside cp and density where its
// compressibility is not known: density and cp do not depend on pressure, cv is cp, and the
// enthalpy has its pressure term from one temperature T0, so that (∂h/∂T)p is cp and
// nothing else:
//
//	h(T, p) = h0(T) + (p − 101325 Pa) · (v − T dv/dT),   the parenthesis at T0
type Incompressible struct {
	at, term      float64 // K, m³/kg
	spread, drift float64 // of the true term: m³/kg from term, m³/(kg K) on the mean
}

// NewIncompressible takes the pressure term at T0 in K. density returns ρ in kg/m³ and its
// slope dρ/dT, from lo to hi in K, which are apart.
func NewIncompressible(T0, lo, hi float64, density func(T float64) (rho, slope float64)) Incompressible {
	term := func(T float64) float64 {
		rho, slope := density(T)
		return (1 + T*slope/rho) / rho // dv = −dρ/ρ²
	}
	c := Incompressible{at: T0, term: term(T0)}
	const steps = 32
	least, most := c.term, c.term
	for k := range steps + 1 {
		t := term(lo + (hi-lo)*float64(k)/steps)
		least, most = min(least, t), max(most, t)
	}
	c.spread = max(most-c.term, c.term-least)
	c.drift = (most - least) / (hi - lo)
	return c
}

// Properties completes the enthalpy at one atmosphere in J/kg, cp in J/(kg K) and density
// in kg/m³ to those at p in Pa.
func (c *Incompressible) Properties(p, h0, cp, rho float64) Properties {
	h := h0 + (p-Atmosphere)*c.term
	return Properties{Enthalpy: h, InternalEnergy: h - p/rho, Cp: cp, Cv: cp, Density: rho}
}

// PressureLaw is that of one temperature.
func (c *Incompressible) PressureLaw() PressureLaw {
	return PressureLaw{Fixed: c.at, Spread: c.spread}
}

// CpChange is what is left out of cp at p in J/(kg K), over the range on the mean: as
// (∂cp/∂p)T is −T ∂²v/∂T², the distance of the pressure from one atmosphere times that of
// the greatest and the least v − T dv/dT over the range of temperature.
func (c *Incompressible) CpChange(p float64) float64 { return math.Abs(p-Atmosphere) * c.drift }
