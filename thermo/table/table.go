// Package table holds a fluid that its user describes: cp and density against
// temperature, from a data sheet or a measurement.
//
// Between two rows cp and density are straight lines, and the enthalpy is the
// exact integral of that cp. Nothing is extrapolated beyond the rows. A single row
// stands for a constant cp and density, over the range that its user states.
//
// A liquid or a solid is taken for incompressible: cp and density do not depend on
// pressure, cv is set to cp, and the enthalpy keeps its pressure term, the same
// at every temperature so that (∂h/∂T)p is cp and nothing else:
//
//	h(T, p) = ∫ cp dT + (p − 101325 Pa) · (v − T dv/dT),
//
// the parenthesis taken in the middle of the range. A gas is tabulated at one
// pressure; its density is scaled to others in proportion and
// cp − cv = p/(ρT), as for an ideal gas.
package table

import (
	"math"

	"heatreeve/thermo"
)

// Point is one row.
type Point struct {
	T       float64 // K
	Cp      float64 // J/(kg K)
	Density float64 // kg/m³
}

const referencePressure = 101325.0 // Pa, where the pressure term is zero

// segment is the stretch from one row to the next.
type segment struct {
	start    Point
	enthalpy float64 // J/kg, at the start
	cpSlope  float64 // J/(kg K²)
	density  float64 // slope, kg/(m³ K)
}

type tabulated struct {
	name, source      string
	phase             thermo.Phase
	segments          []segment
	bounds            thermo.Bounds
	freezing, boiling float64 // K; 0 and +Inf where there is none
	pressureTerm      float64 // m³/kg; 0 for a gas
	gasPressure       float64 // Pa, that of a gas's densities; 0 for others
	cpU, densityU     float64
	molarMass         float64
}

func (f *tabulated) Name() string          { return f.name }
func (f *tabulated) Source() string        { return f.source }
func (f *tabulated) Phase() thermo.Phase   { return f.phase }
func (f *tabulated) Bounds() thermo.Bounds { return f.bounds }
func (f *tabulated) MolarMass() float64    { return f.molarMass }

// Uncertainty is as stated, the same at every state.
func (f *tabulated) Uncertainty(T, p float64) (cp, density float64) { return f.cpU, f.densityU }

// Span returns the freezing and the boiling point as the user stated them, at
// whatever pressure.
func (f *tabulated) Span(float64) (lo, hi float64) { return f.freezing, f.boiling }

func (f *tabulated) At(T, p float64) (thermo.Properties, error) {
	if err := f.bounds.Check(f.name, T, p, "range of the table"); err != nil {
		return thermo.Properties{}, err
	}
	if T < f.freezing || T > f.boiling {
		return thermo.Properties{}, f.otherPhase(T)
	}
	s := f.find(T)
	t := T - s.start.T
	cp := s.start.Cp + t*s.cpSlope
	rho := s.start.Density + t*s.density
	h := s.enthalpy + t*(s.start.Cp+t*s.cpSlope/2) + (p-referencePressure)*f.pressureTerm
	cv := cp
	if f.gasPressure > 0 {
		rho *= p / f.gasPressure
		cv -= p / (rho * T)
	}
	return thermo.Properties{Enthalpy: h, InternalEnergy: h - p/rho, Cp: cp, Cv: cv, Density: rho}, nil
}

// find returns the segment that T lies in, which is within the range.
func (f *tabulated) find(T float64) *segment {
	lo, hi := 0, len(f.segments)
	for hi-lo > 1 {
		mid := int(uint(lo+hi) / 2)
		if f.segments[mid].start.T <= T {
			lo = mid
		} else {
			hi = mid
		}
	}
	return &f.segments[lo]
}

func (f *tabulated) otherPhase(T float64) error {
	e := &thermo.RangeError{Fluid: f.name, Quantity: "temperature", Value: T, Bound: f.freezing, Below: true, Why: f.lowerEnd()}
	if T > f.boiling {
		e.Bound, e.Below, e.Why = f.boiling, false, f.upperEnd()
	}
	return e
}

func (f *tabulated) lowerEnd() string {
	if f.phase == thermo.Gas {
		return "dew point as stated"
	}
	return "freezing point as stated"
}

func (f *tabulated) upperEnd() string {
	if f.phase == thermo.Solid {
		return "melting point as stated"
	}
	return "boiling point as stated"
}

// connect draws the segments through the points; a single point makes a level one.
func connect(points []Point) []segment {
	if len(points) == 1 {
		return []segment{{start: points[0]}}
	}
	var out []segment
	var h float64
	for k, a := range points[:len(points)-1] {
		b := points[k+1]
		dT := b.T - a.T
		out = append(out, segment{a, h, (b.Cp - a.Cp) / dT, (b.Density - a.Density) / dT})
		h += dT * (a.Cp + b.Cp) / 2
	}
	return out
}

// pressureTermAt is v − T dv/dT in m³/kg at T in K.
func (f *tabulated) pressureTermAt(T float64) float64 {
	s := f.find(T)
	rho := s.start.Density + (T-s.start.T)*s.density
	return (1 + T*s.density/rho) / rho
}

// limits returns lo and hi, or no limit for a side that is 0.
func limits(lo, hi float64) (float64, float64) {
	if hi == 0 {
		hi = math.Inf(1)
	}
	return lo, hi
}
