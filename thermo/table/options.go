package table

import (
	"cmp"
	"errors"
	"fmt"
	"math"

	"heatreeve/thermo"
)

// Options are what a table may say beside its rows, and a polynomial beside its
// coefficients. The zero value is a liquid without stated limits.
type Options struct {
	// Phase that is described; zero means thermo.Liquid.
	Phase thermo.Phase
	// MinT and MaxT in K narrow the range within the rows. A table of one row must have
	// both, and so must a polynomial: they say how far it may be taken. Zero means the
	// first and the last row.
	MinT, MaxT float64
	// MaxP in Pa is the highest absolute pressure, at most 1e9; zero means 2.5 MPa, for a
	// gas twice its Pressure.
	MaxP float64
	// Freezing and Boiling in K end the phase at either side: freezing and boiling point of
	// a liquid at the pressure of its circuit, dew point (Freezing) of a gas, melting point
	// (Boiling) of a solid. Zero means none is known, or that the rows have vapour
	// pressures.
	Freezing, Boiling float64
	// Pressure in Pa at which the densities of a gas hold. A gas must have it; the others
	// must not.
	Pressure float64
	// CpUncertainty and DensityUncertainty are relative standard uncertainties, as
	// fractions up to 0.2. Zero means that none is stated, and 1 % is taken (common
	// practice, no source).
	CpUncertainty, DensityUncertainty float64
	// Enthalpies in J/kg of the rows of a table, one a row, from any zero. Where they are
	// given they are met, together with the cp of the rows: between two rows cp is the
	// parabola that has both, which joins the next without a step, but with a kink.
	Enthalpies []float64
	// MolarMass in kg/mol; zero means none.
	MolarMass float64
}

const (
	defaultMaxP        = 2.5e6 // Pa
	defaultUncertainty = 0.01
	maxUncertainty     = 0.2
	maxMolarMass       = 1.0 // kg/mol
	largestP           = 1e9 // Pa
)

func (o Options) withDefaults() Options {
	o.Phase = cmp.Or(o.Phase, thermo.Liquid)
	o.CpUncertainty = cmp.Or(o.CpUncertainty, defaultUncertainty)
	o.DensityUncertainty = cmp.Or(o.DensityUncertainty, defaultUncertainty)
	if o.Phase == thermo.Gas {
		o.MaxP = cmp.Or(o.MaxP, 2*o.Pressure)
	}
	o.MaxP = cmp.Or(o.MaxP, defaultMaxP)
	return o
}

// withRange fills in the range of the rows, in K.
func (o *Options) withRange(first, last float64) {
	o.MinT, o.MaxT = cmp.Or(o.MinT, first), cmp.Or(o.MaxT, last)
}

// describe makes the fluid, but for its vapour pressures and its pressure term.
func (o Options) describe(name, source, extent string) described {
	d := described{
		name: name, source: source, phase: o.Phase,
		bounds: thermo.Bounds{MinT: o.MinT, MaxT: o.MaxT, MaxP: o.MaxP},
		extent: extent,
		cpU:    o.CpUncertainty, densityU: o.DensityUncertainty,
		molarMass: o.MolarMass,
	}
	d.freezing, d.boiling = limits(o.Freezing, o.Boiling)
	if o.Phase == thermo.Gas {
		d.gasPressure = o.Pressure
	}
	return d
}

func positive(v float64) bool { return v > 0 && !math.IsInf(v, 1) }

// check checks all but the temperatures.
func (o Options) check() (faults []error) {
	refuse := func(format string, args ...any) { faults = append(faults, fmt.Errorf(format, args...)) }
	if o.Phase > thermo.Solid {
		refuse("phase %v is unknown", o.Phase)
	}
	if !(o.MaxP > 0 && o.MaxP <= largestP) {
		refuse("highest pressure of %g Pa; it must be above zero and at most %g", o.MaxP, largestP)
	}
	if (o.Phase == thermo.Gas) != (o.Pressure != 0) || o.Pressure != 0 && !positive(o.Pressure) {
		refuse("pressure of the densities is %g Pa; a gas must have one above zero, a liquid or solid none", o.Pressure)
	}
	if u := o.CpUncertainty; !(u >= 0 && u <= maxUncertainty) {
		refuse("uncertainty of cp is %g; it must be a fraction from 0 to %g", u, maxUncertainty)
	}
	if u := o.DensityUncertainty; !(u >= 0 && u <= maxUncertainty) {
		refuse("uncertainty of density is %g; it must be a fraction from 0 to %g", u, maxUncertainty)
	}
	if !(o.MolarMass >= 0 && o.MolarMass < maxMolarMass) {
		refuse("molar mass of %g kg/mol; it must be from 0 to below %g", o.MolarMass, maxMolarMass)
	}
	return faults
}

// checkRange checks the range against the rows, and the phase against the range.
func (o Options) checkRange(points []Point) []error {
	if len(points) == 0 {
		return nil
	}
	first, last, one := points[0].T, points[len(points)-1].T, len(points) == 1
	switch {
	case one && (o.MinT == 0 || o.MaxT == 0):
		return []error{errors.New("one row is a constant cp and density: state the range of temperature that it holds for")}
	case one && !(o.MinT <= first && first <= o.MaxT):
		return []error{fmt.Errorf("row 1: temperature %g K lies outside the stated range %g K to %g K", first, o.MinT, o.MaxT)}
	case !one && (o.MinT < first || o.MaxT > last):
		return []error{fmt.Errorf("range of temperature %g K to %g K goes beyond the rows, %g K to %g K", o.MinT, o.MaxT, first, last)}
	}
	return o.checkPhase()
}

// checkPhase checks the range by itself, and that the phase leaves something of it.
func (o Options) checkPhase() []error {
	lo, hi := limits(o.Freezing, o.Boiling)
	switch {
	case !positive(o.MinT) || !positive(o.MaxT):
		return []error{fmt.Errorf("range of temperature %g K to %g K; both must be finite and above zero", o.MinT, o.MaxT)}
	case o.MinT < leastT || o.MaxT > largest:
		return []error{fmt.Errorf("range of temperature %g K to %g K; it must lie within %g K to %g K", o.MinT, o.MaxT, leastT, largest)}
	case !(o.MinT < o.MaxT):
		return []error{fmt.Errorf("range of temperature %g K to %g K is empty", o.MinT, o.MaxT)}
	case !(lo >= 0 && lo < o.MaxT && hi > o.MinT && lo < hi):
		return []error{fmt.Errorf("freezing point %g K and boiling point %g K leave nothing of the range %g K to %g K", o.Freezing, o.Boiling, o.MinT, o.MaxT)}
	}
	return nil
}
