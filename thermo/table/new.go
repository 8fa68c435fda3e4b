package table

import (
	"cmp"
	"errors"
	"fmt"
	"math"
	"slices"

	"heatreeve/thermo"
)

// Options are what a table may say beside its rows. The zero value is a liquid
// without stated limits.
type Options struct {
	// Phase that the rows describe; zero means thermo.Liquid.
	Phase thermo.Phase
	// MinT and MaxT in K narrow the range within the rows. A table of one row must
	// have both: they say how far its cp and density may be taken for constant.
	// Zero means the first and the last row.
	MinT, MaxT float64
	// MaxP in Pa is the highest absolute pressure; zero means 2.5 MPa, for a gas
	// twice its Pressure.
	MaxP float64
	// Freezing and Boiling in K end the phase at either side: freezing and
	// boiling point of a liquid at the pressure of its circuit, dew point
	// (Freezing) of a gas, melting point (Boiling) of a solid. Zero means none is
	// known.
	Freezing, Boiling float64
	// Pressure in Pa at which the densities of a gas hold. A gas must have it; the others
	// must not.
	Pressure float64
	// CpUncertainty and DensityUncertainty are relative standard uncertainties,
	// as fractions up to 0.2. Zero means that none is stated, and 1 % is taken
	// (common practice, no source).
	CpUncertainty, DensityUncertainty float64
	// MolarMass in kg/mol; zero means none.
	MolarMass float64
}

const (
	defaultMaxP        = 2.5e6 // Pa
	defaultUncertainty = 0.01
	maxUncertainty     = 0.2
	maxMolarMass       = 1.0 // kg/mol
)

// New returns the fluid that the rows describe, under a name and with the source
// of the figures. Rows are finite and above zero, and their temperatures rise from row to
// row. The error names every row, by its number from 1, and every option that is
// wrong.
func New(name, source string, points []Point, opts Options) (thermo.Fluid, error) {
	opts = opts.withDefaults(points)
	faults := slices.Concat(checkNames(name, source), checkPoints(points), opts.check(points))
	if len(faults) == 0 && opts.Phase == thermo.Gas {
		faults = checkGas(points, opts.Pressure)
	}
	if len(faults) > 0 {
		return nil, fmt.Errorf("table %q: %w", name, errors.Join(faults...))
	}
	f := &tabulated{
		name: name, source: source, phase: opts.Phase,
		segments:  connect(points),
		bounds:    thermo.Bounds{MinT: opts.MinT, MaxT: opts.MaxT, MinP: 0, MaxP: opts.MaxP},
		cpU:       opts.CpUncertainty,
		densityU:  opts.DensityUncertainty,
		molarMass: opts.MolarMass,
	}
	f.freezing, f.boiling = limits(opts.Freezing, opts.Boiling)
	if opts.Phase == thermo.Gas {
		f.gasPressure = opts.Pressure
	} else {
		f.pressureTerm = f.pressureTermAt((opts.MinT + opts.MaxT) / 2)
	}
	return f, nil
}

func (o Options) withDefaults(points []Point) Options {
	o.Phase = cmp.Or(o.Phase, thermo.Liquid)
	o.CpUncertainty = cmp.Or(o.CpUncertainty, defaultUncertainty)
	o.DensityUncertainty = cmp.Or(o.DensityUncertainty, defaultUncertainty)
	if o.Phase == thermo.Gas {
		o.MaxP = cmp.Or(o.MaxP, 2*o.Pressure)
	}
	o.MaxP = cmp.Or(o.MaxP, defaultMaxP)
	if n := len(points); n > 1 {
		o.MinT = cmp.Or(o.MinT, points[0].T)
		o.MaxT = cmp.Or(o.MaxT, points[n-1].T)
	}
	return o
}

func checkNames(name, source string) (faults []error) {
	if name == "" {
		faults = append(faults, errors.New("it has no name"))
	}
	if source == "" {
		faults = append(faults, errors.New("no source is given; say where the figures come from"))
	}
	return faults
}

func checkPoints(points []Point) (faults []error) {
	if len(points) == 0 {
		return []error{errors.New("it has no rows")}
	}
	for k, p := range points {
		for _, c := range []struct {
			name, unit string
			value      float64
		}{{"temperature", "K", p.T}, {"cp", "J/(kg K)", p.Cp}, {"density", "kg/m³", p.Density}} {
			if !positive(c.value) {
				faults = append(faults, fmt.Errorf("row %d: %s of %g %s; it must be finite and above zero", k+1, c.name, c.value, c.unit))
			}
		}
		if k > 0 && !(p.T > points[k-1].T) {
			faults = append(faults, fmt.Errorf("row %d: temperature %g K does not rise above the %g K of row %d", k+1, p.T, points[k-1].T, k))
		}
	}
	return faults
}

func positive(v float64) bool { return v > 0 && !math.IsInf(v, 1) }

func (o Options) check(points []Point) (faults []error) {
	refuse := func(format string, args ...any) { faults = append(faults, fmt.Errorf(format, args...)) }
	if o.Phase > thermo.Solid {
		refuse("phase %v is unknown", o.Phase)
	}
	if len(points) > 0 {
		o.checkRange(points, refuse)
	}
	if !positive(o.MaxP) {
		refuse("highest pressure of %g Pa; it must be finite and above zero", o.MaxP)
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

// checkRange checks the temperatures of the range and of the phase.
func (o Options) checkRange(points []Point, refuse func(string, ...any)) {
	first, last := points[0].T, points[len(points)-1].T
	one := len(points) == 1
	lo, hi := limits(o.Freezing, o.Boiling)
	switch {
	case one && (o.MinT == 0 || o.MaxT == 0):
		refuse("one row is a constant cp and density: state the range of temperature that it holds for")
	case !positive(o.MinT) || !positive(o.MaxT):
		refuse("range of temperature %g K to %g K; both must be finite and above zero", o.MinT, o.MaxT)
	case !(o.MinT < o.MaxT):
		refuse("range of temperature %g K to %g K is empty", o.MinT, o.MaxT)
	case one && !(o.MinT <= first && first <= o.MaxT):
		refuse("row 1: temperature %g K lies outside the stated range %g K to %g K", first, o.MinT, o.MaxT)
	case !one && (o.MinT < first || o.MaxT > last):
		refuse("range of temperature %g K to %g K goes beyond the rows, %g K to %g K", o.MinT, o.MaxT, first, last)
	case !(lo >= 0 && lo < o.MaxT && hi > o.MinT && lo < hi):
		refuse("freezing point %g K and boiling point %g K leave nothing of the range %g K to %g K", o.Freezing, o.Boiling, o.MinT, o.MaxT)
	}
}

// checkGas makes sure that cv = cp − p/(ρT) is above zero all along: from
// row to row neither cp nor ρT falls below the lesser of its ends.
func checkGas(points []Point, p float64) (faults []error) {
	if len(points) == 1 {
		return []error{errors.New("one row is a constant density, which no gas has at one pressure; give two rows or more")}
	}
	for k := range points {
		a, b := points[max(k-1, 0)], points[k]
		if min(a.Cp, b.Cp)*min(a.Density*a.T, b.Density*b.T) <= p {
			faults = append(faults, fmt.Errorf("row %d: cp %g J/(kg K) is no more than p/(ρT) = %.4g J/(kg K) at %g Pa; no gas has a cv below zero", k+1, b.Cp, p/(b.Density*b.T), p))
		}
	}
	return faults
}
