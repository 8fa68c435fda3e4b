package table

import (
	"errors"
	"fmt"
	"slices"

	"heatreeve/thermo"
)

// New returns the fluid that the rows describe, under a name and with the source of the
// figures. Rows are at least 1 K, 1 J/(kg K) and 1e-4 kg/m³ and at most 1e6 in SI units,
// and their temperatures rise from row to row. The error names every row, by its number from 1, and every option that
// is wrong.
func New(name, source string, points []Point, opts Options) (thermo.Fluid, error) {
	opts = opts.withDefaults()
	if n := len(points); n > 1 {
		opts.withRange(points[0].T, points[n-1].T)
	}
	faults := slices.Concat(checkNames(name, source), checkPoints(points), opts.check(), opts.checkRange(points), opts.checkVapour(points), opts.checkEnthalpies(points))
	if len(faults) == 0 {
		f := &tabulated{described: opts.describe(name, source, "range of the table")}
		f.connect(points, opts.Enthalpies)
		f.setBoiling(newVapour(points))
		f.stiffen(f.densityAt, f.cpAt)
		if opts.Phase != thermo.Gas {
			return f, nil
		}
		if faults = f.checkGas(points); len(faults) == 0 {
			return f, nil
		}
	}
	return nil, fmt.Errorf("table %q: %w", name, errors.Join(faults...))
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

// Far beyond any temperature, cp or density of a plant, in SI units: between these figures no
// property overflows.
const (
	leastT       = 1.0  // K
	leastCp      = 1.0  // J/(kg K)
	leastDensity = 1e-4 // kg/m³
	largest      = 1e6
)

func checkPoints(points []Point) (faults []error) {
	if len(points) == 0 {
		return []error{errors.New("it has no rows")}
	}
	for k, p := range points {
		for _, c := range []struct {
			name, unit   string
			value, least float64
		}{{"temperature", "K", p.T, leastT}, {"cp", "J/(kg K)", p.Cp, leastCp}, {"density", "kg/m³", p.Density, leastDensity}} {
			if !(c.value >= c.least && c.value <= largest) {
				faults = append(faults, fmt.Errorf("row %d: %s of %g %s; it must be from %g to %g", k+1, c.name, c.value, c.unit, c.least, largest))
			}
		}
		if k > 0 && !(p.T > points[k-1].T) {
			faults = append(faults, fmt.Errorf("row %d: temperature %g K does not rise above the %g K of row %d", k+1, p.T, points[k-1].T, k))
		}
	}
	return faults
}

// checkEnthalpies makes sure that cp stays above the least between rows whose enthalpies are
// given.
func (o Options) checkEnthalpies(points []Point) (faults []error) {
	h := o.Enthalpies
	switch {
	case h == nil:
		return nil
	case len(h) != len(points) || len(h) < 2:
		return []error{fmt.Errorf("%d enthalpies beside %d rows; want one a row, and two rows or more", len(h), len(points))}
	}
	for k := 1; k < len(points); k++ {
		a, b := points[k-1], points[k]
		cp := parabolas([]float64{a.T, b.T}, []float64{a.Cp, b.Cp}, h[k-1:k+1])[0]
		cp[0] -= leastCp * (1 - 1e-12) // a row may have it
		if _, ok := above(cp[:], 0, b.T-a.T); !ok || !(h[k]-h[k-1] <= largest*(b.T-a.T)) {
			faults = append(faults, fmt.Errorf("row %d: enthalpies of %g and %g J/kg are not those of a cp of %g and %g J/(kg K) at %g and %g K", k+1, h[k-1], h[k], a.Cp, b.Cp, a.T, b.T))
		}
	}
	return faults
}

// leastRise is by what fraction a vapour pressure rises at least from row to row, so that
// their logarithms are apart.
const leastRise = 1e-9

// checkVapour checks the column of vapour pressures.
func (o Options) checkVapour(points []Point) (faults []error) {
	last, known := 0.0, 0
	for k, p := range points {
		switch v := p.VapourPressure; {
		case v == 0 && last == 0:
			continue
		case v == 0:
			faults = append(faults, fmt.Errorf("row %d: no vapour pressure, though row %d has one; only the first rows may lack it", k+1, k))
		case !positive(v) || !(v > last*(1+leastRise)):
			faults = append(faults, fmt.Errorf("row %d: vapour pressure of %g Pa does not rise above the %g Pa before it (by 1e-9 of it at least)", k+1, v, last))
		}
		last, known = p.VapourPressure, known+1
	}
	switch {
	case known == 0:
	case known == 1:
		faults = append(faults, errors.New("one vapour pressure makes no curve; give two or more, or the boiling point instead"))
	case o.Phase != thermo.Liquid:
		faults = append(faults, fmt.Errorf("vapour pressures are those of a liquid, the phase is %v", o.Phase))
	case o.Boiling != 0:
		faults = append(faults, fmt.Errorf("boiling point of %g K beside vapour pressures; give one or the other", o.Boiling))
	case len(faults) == 0 && !(o.MaxP > points[len(points)-known].VapourPressure):
		faults = append(faults, fmt.Errorf("highest pressure of %g Pa is no more than the first vapour pressure", o.MaxP))
	}
	return faults
}

// setBoiling has the liquid boil by its vapour pressures. Where they are lower than the
// least of them nothing is known, so that the range begins there.
func (f *tabulated) setBoiling(v *vapour) {
	if f.vapour = v; v != nil {
		f.bounds.MinP = v.lowest
	}
}

// checkGas makes sure that cv = cp − p/(ρT) is above zero, first at the rows and then all
// along the cubics between them.
func (f *tabulated) checkGas(points []Point) (faults []error) {
	if len(points) == 1 {
		return []error{errors.New("one row is a constant density, which no gas has at one pressure; give two rows or more")}
	}
	for k, p := range points {
		if r := f.gasPressure / (p.Density * p.T); p.Cp <= r {
			faults = append(faults, fmt.Errorf("row %d: cp %g J/(kg K) is no more than p/(ρT) = %.4g J/(kg K) at %g Pa; no gas has a cv below zero", k+1, p.Cp, r, f.gasPressure))
		}
	}
	if len(faults) > 0 {
		return faults
	}
	for k, s := range f.segments {
		c := ideal(s.cp[:], s.density[:], f.starts[k], f.gasPressure)
		if t, ok := above(c, 0, points[k+1].T-points[k].T); !ok {
			faults = append(faults, fmt.Errorf("row %d: on the way to row %d, at %.6g K, cp is no more than p/(ρT); no gas has a cv below zero", k+1, k+2, f.starts[k]+t))
		}
	}
	return faults
}
