// Package table holds a fluid that its user describes: cp and density against temperature,
// from a data sheet or a measurement, as rows or as polynomials.
//
// Between two rows cp and density are cubics which pass through the rows with a continuous
// slope and stay between their two values, and the enthalpy is the exact integral of that
// cp. (Where the enthalpies of the rows are given as well, cp is a parabola between them.)
// Two rows are a straight line. A single row stands for a constant cp and density, over the
// range that its user states. Nothing is extrapolated beyond the rows, nor beyond the
// stated range of a polynomial.
//
// A liquid or a solid is taken for incompressible: cp and density do not depend on
// pressure, cv is set to cp, and the enthalpy keeps its pressure term, the same at every
// temperature so that (∂h/∂T)p is cp and nothing else:
//
//	h(T, p) = ∫ cp dT + (p − 101325 Pa) · (v − T dv/dT),
//
// the parenthesis taken in the middle of the range in which it may be under its highest
// pressure. Towards the ends the true term has another size, of a hot organic liquid even
// another sign: thermo.PressureLaw tells by how much (of the heat-transfer liquids of
// package oil up to 1 kJ/kg per MPa), and cp, which falls with pressure for the same
// reason, has it in its uncertainty. A gas is tabulated at one pressure; its
// density is scaled to others in proportion and cp − cv = p/(ρT), as for an ideal gas.
//
// A liquid boils where its user says so, or by the vapour pressures of its rows.
//
// Against exact functions the cubics converge with the third order of the distance between
// rows, at an extremum with the second. What published rows leave open is measured in the
// packages oil and solid.
//
// Not modelled: compressibility, a phase change within the range (a peak of cp that stands
// for latent heat is a peak of cp here), composition.
package table

import "heatreeve/thermo"

// Point is one row.
type Point struct {
	T       float64 // K
	Cp      float64 // J/(kg K)
	Density float64 // kg/m³
	// VapourPressure of a liquid in Pa, absolute. Zero means that none is known: rows
	// without one may come before those with, where it is too low to matter, but not after.
	VapourPressure float64
}

// segment is the stretch from one row to the next.
type segment struct {
	enthalpy    float64 // J/kg, at the start
	cp, density cubic   // in K from the start
	vapour      float64 // Pa, vapour pressure at the end; 0 where none is known
}

type tabulated struct {
	described
	starts   []float64 // K
	segments []segment
}

func (f *tabulated) At(T, p float64) (thermo.Properties, error) {
	if err := f.check(T, p); err != nil {
		return thermo.Properties{}, err
	}
	k := stretch(f.starts, T)
	s, t := &f.segments[k], T-f.starts[k]
	if p < s.vapour { // else it boils beyond this stretch
		if boiling := f.vapour.boiling(p); T > boiling {
			return thermo.Properties{}, f.otherPhase(T, boiling)
		}
	}
	return f.properties(T, p, s.cp.at(t), s.density.at(t), s.enthalpy+s.cp.integral(t)), nil
}

// connect draws the segments through the points, and enthalpies where they are not nil; a
// single point makes a level one.
func (f *tabulated) connect(points []Point, enthalpies []float64) {
	if len(points) == 1 {
		p := points[0]
		f.starts = []float64{p.T}
		f.segments = []segment{{cp: cubic{p.Cp}, density: cubic{p.Density}}}
		return
	}
	var T, cp, rho []float64
	for _, p := range points {
		T, cp, rho = append(T, p.T), append(cp, p.Cp), append(rho, p.Density)
	}
	f.starts = T[:len(T)-1]
	cps, rhos := interpolate(T, cp), interpolate(T, rho)
	if enthalpies != nil {
		cps = parabolas(T, cp, enthalpies)
	}
	var h float64
	for k := range cps {
		f.segments = append(f.segments, segment{h, cps[k], rhos[k], points[k+1].VapourPressure})
		h += cps[k].integral(T[k+1] - T[k])
	}
}

// cpAt returns cp in J/(kg K) at T in K.
func (f *tabulated) cpAt(T float64) float64 {
	k := stretch(f.starts, T)
	return f.segments[k].cp.at(T - f.starts[k])
}

// densityAt returns the density in kg/m³ and its slope at T in K.
func (f *tabulated) densityAt(T float64) (rho, slope float64) {
	k := stretch(f.starts, T)
	c, t := &f.segments[k].density, T-f.starts[k]
	return c.at(t), c.slope(t)
}
