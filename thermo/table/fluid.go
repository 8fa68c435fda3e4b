package table

import (
	"math"

	"heatreeve/thermo"
)

// described is what a fluid by rows and one by polynomials have in common: all but cp,
// density and the integral of cp at a temperature.
type described struct {
	name, source      string
	phase             thermo.Phase
	bounds            thermo.Bounds
	extent            string                // what the bounds are
	freezing, boiling float64               // K, as stated; 0 and +Inf where there is none
	vapour            *vapour               // nil where no vapour pressure is known
	stiff             thermo.Incompressible // unless it is a gas
	middleCp          float64               // J/(kg K), of that
	gasPressure       float64               // Pa, that of a gas's densities; 0 for others
	cpU, densityU     float64
	molarMass         float64
}

func (d *described) Name() string          { return d.name }
func (d *described) Source() string        { return d.source }
func (d *described) Phase() thermo.Phase   { return d.phase }
func (d *described) Bounds() thermo.Bounds { return d.bounds }
func (d *described) MolarMass() float64    { return d.molarMass }

// Uncertainty is as stated, the same at every state, but for what an incompressible fluid
// leaves out of cp at p (see [thermo.Incompressible]): that is a half-width of cp, beside
// the stated one as a root sum of squares.
func (d *described) Uncertainty(T, p float64) (cp, density float64) {
	if d.gasPressure > 0 {
		return d.cpU, d.densityU
	}
	return math.Hypot(d.cpU, d.stiff.CpChange(p)/d.middleCp/math.Sqrt(3)), d.densityU
}

// PressureLaw is that of an ideal gas or of an incompressible fluid.
func (d *described) PressureLaw() thermo.PressureLaw {
	if d.gasPressure > 0 {
		return thermo.PressureLaw{Ideal: true}
	}
	return d.stiff.PressureLaw()
}

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
	if d.gasPressure == 0 {
		return d.stiff.Properties(p, heat, cp, rho)
	}
	rho *= p / d.gasPressure
	return thermo.Properties{Enthalpy: heat, InternalEnergy: heat - p/rho, Cp: cp, Cv: cp - p/(rho*T), Density: rho}
}

// stiffen takes the pressure term of a liquid or solid in the middle of where it may be
// under the highest pressure. density gives ρ and its slope, cp that in J/(kg K).
func (d *described) stiffen(density func(T float64) (rho, slope float64), cp func(T float64) float64) {
	lo, hi := d.Span(d.bounds.MaxP)
	lo, hi = max(lo, d.bounds.MinT), min(hi, d.bounds.MaxT)
	if !(lo < hi) {
		lo, hi = d.bounds.MinT, d.bounds.MaxT
	}
	middle := (lo + hi) / 2
	d.stiff, d.middleCp = thermo.NewIncompressible(middle, lo, hi, density), cp(middle)
}

// limits returns lo and hi, or no limit for a side that is 0.
func limits(lo, hi float64) (float64, float64) {
	if hi == 0 {
		hi = math.Inf(1)
	}
	return lo, hi
}
