package table

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"heatreeve/thermo"
)

const (
	maxDegree = 6
	zeroC     = 273.15 // K, where the polynomials have their origin
)

// power is a polynomial in T − 273.15 K, lowest power first.
type power [maxDegree + 1]float64

func (c *power) at(t float64) float64 {
	return c[0] + t*(c[1]+t*(c[2]+t*(c[3]+t*(c[4]+t*(c[5]+t*c[6])))))
}

func (c *power) slope(t float64) float64 {
	return c[1] + t*(2*c[2]+t*(3*c[3]+t*(4*c[4]+t*(5*c[5]+t*6*c[6]))))
}

type polynomial struct {
	described
	cp, density power
	heat        power // integral of cp from 0 °C, over t
}

// Polynomial returns the fluid whose cp in J/(kg K) and density in kg/m³ are polynomials of
// degree 6 at most:
//
//	Y(T) = c[0] + c[1] t + c[2] t² + ...,   t = T − 273.15 K
//
// opts must state the range in MinT and MaxT. Over the whole of it cp and density lie
// between the least and the greatest that [New] takes of a row, and cv of a gas is above
// zero: not by samples, but proven by the coefficients in Bernstein's basis, between which
// a polynomial stays. The error names
// everything that is wrong, and a temperature where a polynomial is not as it must be.
func Polynomial(name, source string, cp, density []float64, opts Options) (thermo.Fluid, error) {
	opts = opts.withDefaults()
	faults := slices.Concat(checkNames(name, source), opts.check(),
		checkCoefficients("cp", cp), checkCoefficients("density", density), opts.checkPolynomialRange())
	if len(faults) == 0 {
		faults = opts.checkValues(cp, density)
	}
	if len(faults) > 0 {
		return nil, fmt.Errorf("polynomial %q: %w", name, errors.Join(faults...))
	}
	f := &polynomial{described: opts.describe(name, source, "stated range of the polynomials")}
	copy(f.cp[:], cp)
	copy(f.density[:], density)
	for k, c := range f.cp {
		f.heat[k] = c / float64(k+1)
	}
	f.stiffen(func(T float64) (rho, slope float64) { return f.density.at(T - zeroC), f.density.slope(T - zeroC) },
		func(T float64) float64 { return f.cp.at(T - zeroC) })
	return f, nil
}

func (f *polynomial) At(T, p float64) (thermo.Properties, error) {
	if err := f.check(T, p); err != nil {
		return thermo.Properties{}, err
	}
	t := T - zeroC
	return f.properties(T, p, f.cp.at(t), f.density.at(t), t*f.heat.at(t)), nil
}

func checkCoefficients(what string, c []float64) []error {
	if len(c) == 0 || len(c) > maxDegree+1 {
		return []error{fmt.Errorf("%s has %d coefficients; want 1 to %d, lowest power of (T − 273.15 K) first", what, len(c), maxDegree+1)}
	}
	for k, v := range c {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return []error{fmt.Errorf("coefficient %d of %s is %g; it must be finite", k, what, v)}
		}
	}
	return nil
}

func (o Options) checkPolynomialRange() []error {
	if o.Enthalpies != nil {
		return []error{errors.New("enthalpies are those of the rows of a table; a polynomial has none")}
	}
	if o.MinT == 0 || o.MaxT == 0 {
		return []error{errors.New("a polynomial does not say how far it holds: state the range of temperature")}
	}
	return o.checkPhase()
}

// checkValues proves what Polynomial promises of the figures.
func (o Options) checkValues(cp, density []float64) (faults []error) {
	prove := func(c []float64, fault string) bool {
		t, ok := above(c, o.MinT-zeroC, o.MaxT-zeroC)
		if !ok {
			faults = append(faults, fmt.Errorf("%s at %.6g K, within the range %g K to %g K", fault, zeroC+t, o.MinT, o.MaxT))
		}
		return ok
	}
	if prove(cp, "cp is not above zero") {
		prove(beyond(cp, leastCp), fmt.Sprintf("cp is below %g J/(kg K)", leastCp))
	}
	if prove(density, "density is not above zero") {
		prove(beyond(density, leastDensity), fmt.Sprintf("density is below %g kg/m³", leastDensity))
	}
	prove(below(cp), fmt.Sprintf("cp is above %g J/(kg K)", largest))
	prove(below(density), fmt.Sprintf("density is above %g kg/m³", largest))
	if len(faults) > 0 || o.Phase != thermo.Gas {
		return faults
	}
	if !slices.ContainsFunc(density[1:], func(c float64) bool { return c != 0 }) {
		return []error{errors.New("density is constant, which it is of no gas at one pressure")}
	}
	prove(ideal(cp, density, zeroC, o.Pressure), "cp is no more than p/(ρT), so that cv is not above zero,")
	return faults
}

// beyond is by how much the polynomial c is above the least value, a hair lower.
func beyond(c []float64, least float64) []float64 {
	out := slices.Clone(c)
	out[0] -= least * (1 - 1e-12)
	return out
}

// below is what remains from the polynomial c up to the largest value.
func below(c []float64) []float64 {
	out := make([]float64, len(c))
	for k, v := range c {
		out[k] = -v
	}
	out[0] += largest
	return out
}
