// Package aqueous holds mixtures of water with ethylene or propylene glycol.
//
// Density, cp and freezing point are Melinder's polynomials in temperature and
// mass fraction, from the freezing point to 373.15 K and to 60 % by mass. They
// describe the plain mixture: the inhibitors of a commercial fluid, some
// per cent of it, are not modelled.
//
// The mixture is taken for incompressible: density and cp do not depend on
// pressure, and cv is set to cp for want of a compressibility in the source.
// Enthalpy keeps its pressure term, the same at every temperature so that
// (∂h/∂T)p is cp and nothing else:
//
//	h(T, p) = ∫ cp dT + (p − 101325 Pa) · (v − T dv/dT),
//
// the parenthesis taken at the base temperature of the polynomials, near 32 °C.
// Pressures run from 611 Pa to 2.5 MPa: at the upper end water, which is more
// compressible than either mixture, is 0.12 % denser and has 0.13 % to 0.24 % less
// cp than at 1 bar (IAPWS-IF97, 5 °C to 90 °C). That is small beside what the
// polynomials themselves leave open.
package aqueous

import (
	"fmt"
	"math"

	"heatreeve/thermo"
	"heatreeve/thermo/water"
)

const (
	referencePressure = 101325.0 // Pa, where the pressure term is zero
	minPressure       = 611.2127 // Pa: below it water boils at its freezing point
	maxPressure       = 2.5e6    // Pa
)

// cubic is a polynomial in T − base, lowest power first.
type cubic [4]float64

func (c *cubic) at(t float64) float64 { return c[0] + t*(c[1]+t*(c[2]+t*c[3])) }

// integral from t = 0.
func (c *cubic) integral(t float64) float64 {
	return t * (c[0] + t*(c[1]/2+t*(c[2]/3+t*(c[3]/4))))
}

// mixture has its polynomials worked out for one concentration.
type mixture struct {
	name          string
	base          float64 // K
	density, cp   cubic
	pressureTerm  float64 // m³/kg
	bounds        thermo.Bounds
	cpU, densityU float64
}

// Name gives the concentration by mass.
func (m *mixture) Name() string { return m.name }

func (m *mixture) Source() string {
	return "Melinder, Properties of Secondary Working Fluids for Indirect Systems, IIR 2010"
}

func (m *mixture) Phase() thermo.Phase   { return thermo.Liquid }
func (m *mixture) Bounds() thermo.Bounds { return m.bounds }

// MolarMass is 0: the source gives the mixture by mass.
func (m *mixture) MolarMass() float64 { return 0 }

// Uncertainty is the root sum of squares of two parts: the polynomials, by their
// deviation from the ASHRAE tables (cp 1.15 % and density 0.48 % for ethylene glycol, 0.5 %
// and 0.37 % for propylene glycol), and the stated uncertainty of the mass
// fraction, by the slope of cp and density half-way between freezing point and
// 373.15 K.
func (m *mixture) Uncertainty(T, p float64) (cp, density float64) { return m.cpU, m.densityU }

// Span returns the freezing point of the mixture and the boiling point of water at p.
// The mixture itself boils at a higher temperature, since either glycol is far
// less volatile than water, so the upper end is on the safe side.
func (m *mixture) Span(p float64) (lo, hi float64) {
	lo = m.bounds.MinT
	switch {
	case !(p >= minPressure):
		return lo, lo
	case p > maxPressure:
		p = maxPressure // boils later still, and beyond the range either way
	}
	hi, err := water.SaturationTemperature(p)
	if err != nil {
		return lo, lo
	}
	return lo, max(lo, hi)
}

// boilsAbove is the pressure in Pa from which on water boils beyond the range.
const boilsAbove = 101420.0

func (m *mixture) At(T, p float64) (thermo.Properties, error) {
	if err := m.bounds.Check(m.name, T, p, m.why(T)); err != nil {
		return thermo.Properties{}, err
	}
	if p < boilsAbove {
		if _, hi := m.Span(p); T > hi {
			return thermo.Properties{}, m.boils(T, hi)
		}
	}
	t := T - m.base
	cp, rho := m.cp.at(t), m.density.at(t)
	h := m.cp.integral(t) + (p-referencePressure)*m.pressureTerm
	return thermo.Properties{Enthalpy: h, InternalEnergy: h - p/rho, Cp: cp, Cv: cp, Density: rho}, nil
}

func (m *mixture) why(T float64) string {
	if T < m.bounds.MinT {
		return "freezing point"
	}
	return "range of the polynomials"
}

func (m *mixture) boils(T, bound float64) error {
	return &thermo.RangeError{
		Fluid: m.name, Quantity: "temperature", Value: T, Bound: bound,
		Why: "boiling point of water at this pressure; the mixture boils a little later",
	}
}

// mix works out the polynomials at mass fraction x, known to u.
func (s *solute) mix(x, u float64) *mixture {
	m := &mixture{
		name:    fmt.Sprintf("%s %.4g %%", s.name, 100*x),
		base:    s.baseT,
		density: at(&s.density, x-s.baseX),
		cp:      at(&s.cp, x-s.baseX),
	}
	freezing := horner(s.freezing[:], x-s.baseX)
	m.bounds = thermo.Bounds{MinT: freezing, MaxT: maxTemperature, MinP: minPressure, MaxP: maxPressure}
	rho, slope := m.density[0], m.density[1]
	m.pressureTerm = (1 + s.baseT*slope/rho) / rho // v − T dv/dT, with dv = −dρ/ρ²

	middle := (freezing+maxTemperature)/2 - s.baseT
	m.cpU = math.Hypot(s.cpFit, u*relativeSlope(&s.cp, x-s.baseX, middle))
	m.densityU = math.Hypot(s.densityFit, u*relativeSlope(&s.density, x-s.baseX, middle))
	return m
}

// at reduces a polynomial in temperature and concentration to one in
// temperature, at the concentration d above its base.
func at(c *[4][6]float64, d float64) cubic {
	var out cubic
	for i := range c {
		out[i] = horner(c[i][:], d)
	}
	return out
}

// relativeSlope is ∂ ln Y/∂x at the temperature t above its base.
func relativeSlope(c *[4][6]float64, d, t float64) float64 {
	var slope cubic
	for i := range c {
		var derivative [5]float64
		for j := range derivative {
			derivative[j] = float64(j+1) * c[i][j+1]
		}
		slope[i] = horner(derivative[:], d)
	}
	value := at(c, d)
	return slope.at(t) / value.at(t)
}

func horner(c []float64, x float64) float64 {
	var sum float64
	for k := len(c) - 1; k >= 0; k-- {
		sum = sum*x + c[k]
	}
	return sum
}
