package table

import (
	"math"

	"heatreeve/thermo"
)

const referencePressure = 101325.0 // Pa, where the pressure term is zero

// described is what a fluid by rows and one by polynomials have in common: all but cp,
// density and the integral of cp at a temperature.
type described struct {
	name, source      string
	phase             thermo.Phase
	bounds            thermo.Bounds
	extent            string  // what the bounds are
	freezing, boiling float64 // K, as stated; 0 and +Inf where there is none
	vapour            *vapour // nil where no vapour pressure is known
	pressureTerm      float64 // m³/kg; 0 for a gas
	gasPressure       float64 // Pa, that of a gas's densities; 0 for others
	cpU, densityU     float64
	molarMass         float64
}

func (d *described) Name() string          { return d.name }
func (d *described) Source() string        { return d.source }
func (d *described) Phase() thermo.Phase   { return d.phase }
func (d *described) Bounds() thermo.Bounds { return d.bounds }
func (d *described) MolarMass() float64    { return d.molarMass }

// Uncertainty is as stated, the same at every state.
func (d *described) Uncertainty(T, p float64) (cp, density float64) { return d.cpU, d.densityU }

// Span returns the freezing and the boiling point as the user stated them, at whatever
// pressure, or the boiling point at p by the vapour pressures of the rows.
func (d *described) Span(p float64) (lo, hi float64) {
	if d.vapour != nil {
		return d.freezing, d.vapour.boiling(p)
	}
	return d.freezing, d.boiling
}

// check returns a *[thermo.RangeError] where T and p lie outside the bounds or the limits
// as stated.
func (d *described) check(T, p float64) error {
	if err := d.bounds.Check(d.name, T, p, d.extent); err != nil {
		return err
	}
	if T < d.freezing || T > d.boiling {
		return d.otherPhase(T, d.boiling)
	}
	return nil
}

func (d *described) otherPhase(T, boiling float64) error {
	if T > boiling {
		return &thermo.RangeError{Fluid: d.name, Quantity: "temperature", Value: T, Bound: boiling, Why: d.upperEnd()}
	}
	return &thermo.RangeError{Fluid: d.name, Quantity: "temperature", Value: T, Bound: d.freezing, Below: true, Why: d.lowerEnd()}
}

func (d *described) lowerEnd() string {
	if d.phase == thermo.Gas {
		return "dew point as stated"
	}
	return "freezing point as stated"
}

func (d *described) upperEnd() string {
	switch {
	case d.vapour != nil:
		return "boiling point at this pressure"
	case d.phase == thermo.Solid:
		return "melting point as stated"
	}
	return "boiling point as stated"
}

// properties completes cp in J/(kg K), density in kg/m³ and the integral of cp in J/kg at T
// and p.
func (d *described) properties(T, p, cp, rho, heat float64) thermo.Properties {
	h := heat + (p-referencePressure)*d.pressureTerm
	cv := cp
	if d.gasPressure > 0 {
		rho *= p / d.gasPressure
		cv -= p / (rho * T)
	}
	return thermo.Properties{Enthalpy: h, InternalEnergy: h - p/rho, Cp: cp, Cv: cv, Density: rho}
}

// setPressureTerm keeps v − T dv/dT of a liquid or solid, from its density and the slope of
// that at T in K.
func (d *described) setPressureTerm(T, rho, slope float64) {
	if d.phase != thermo.Gas {
		d.pressureTerm = (1 + T*slope/rho) / rho
	}
}

// limits returns lo and hi, or no limit for a side that is 0.
func limits(lo, hi float64) (float64, float64) {
	if hi == 0 {
		hi = math.Inf(1)
	}
	return lo, hi
}
