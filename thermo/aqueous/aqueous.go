// Package aqueous holds mixtures of water with one of thirteen solutes: two glycols,
// ethanol, methanol and glycerol, seven salts, and ammonia.
//
// Density, cp and freezing point are Melinder's polynomials in temperature and mass
// fraction, from the freezing point to 40 °C, to 100 °C for the glycols, to 30 °C
// for ammonia, each to a largest concentration of its own; calcium, magnesium and
// sodium chloride end at their eutectic, 29.7 %, 20.5 % and 23 %. They describe the
// plain mixture. Not modelled: the inhibitors of a commercial fluid (some per cent
// of it), two solutes at once, crystals of solute or hydrate on the far side of an
// eutectic, gas driven out of solution.
//
// Largest deviations found, of cp and of density, in per cent: ethylene glycol 3.2
// and 0.92, propylene glycol 0.35 and 0.64 (ASHRAE, density worst above 40 °C);
// sodium chloride 0.38 and 0.05, calcium chloride 0.54 and 0.43, magnesium chloride
// 0.90 and 0.28, lithium chloride 2.1 and 0.17, potassium carbonate 0.17 (5 % by
// mass only) and 0.71, potassium acetate and formate 0.38 and 0.29 in density,
// ethanol 2.5 and 0.52 (Laliberté); ammonia 2.5 and 0.26 from 5 °C to 25 °C, 4.6 and
// 0.36 from -13 °C to 30 °C (IAPWS G4-01). Colder ammonia of 28 % and more goes on apart
// from G4-01, by 0.3 % of cp a kelvin: 6.4 at -20 °C, 10.9 at -35 °C, 18 at -55 °C. The
// uncertainty covers that down to there; further down G4-01 has less cp than either
// part by itself, by half in the end, and is not believed. Methanol and glycerol have only
// Melinder's own tables to be held against, 2.3 and 0.4 in cp; ethanol of 60 % at
// -10 °C is 3.4 off them. With nothing dissolved the polynomials differ from
// IAPWS-IF97 by at most 0.66 in cp and 0.13 in density; they freeze within 0.05 K of
// 273.15 K, and are led to the very 273.15 K below 2 %. The uncertainties of a state follow from these.
//
// The freezing curves stand within 0.6 K of the ASHRAE glycol tables (from memory)
// to 30 % by mass. Stronger propylene glycol freezes up to 1.3 K later there than here,
// which is the safe side, but ethylene glycol sooner: 1.5 K at 40 %, 2.2 K at 50 %, 2.9 K
// at 60 %. There Span begins at ASHRAE's freezing point and not at Melinder's.
// Keep a margin of 3 K to 5 K from it.
//
// The mixture is taken for incompressible: density and cp do not depend on
// pressure, and cv is set to cp for want of a compressibility in the source.
// Enthalpy keeps its pressure term, the same at every temperature so that
// (∂h/∂T)p is cp and nothing else:
//
//	h(T, p) = ∫ cp dT + (p − 101325 Pa) · (v − T dv/dT),
//
// the parenthesis taken half-way from 0 °C to the upper end: at 50 °C for the glycols,
// 20 °C, for ammonia 15 °C. Pressures run to 2.5 MPa: there water, more compressible
// than the mixtures, is 0.12 % denser and has 0.13 % to 0.24 % less cp than at 1 bar
// (IAPWS-IF97, 5 °C to 90 °C). That is small beside what the polynomials
// themselves leave open; what of it follows from the density is in the uncertainty of cp.
// The term itself is off at other temperatures by up to 0.22 kJ/kg per MPa.
package aqueous

import (
	"math"

	"heatreeve/thermo"
)

const (
	zeroC       = 273.15 // K
	maxPressure = 2.5e6  // Pa
)

// cubic is a polynomial in T − base, lowest power first.
type cubic [4]float64

func (c *cubic) at(t float64) float64 { return c[0] + t*(c[1]+t*(c[2]+t*c[3])) }

func (c *cubic) slope(t float64) float64 { return c[1] + t*(2*c[2]+t*3*c[3]) }

// integral from t = 0.
func (c *cubic) integral(t float64) float64 {
	return t * (c[0] + t*(c[1]/2+t*(c[2]/3+t*(c[3]/4))))
}

// mixture has its polynomials worked out for one concentration.
type mixture struct {
	name                string
	base                float64 // K
	density, cp         cubic
	stiff               thermo.Incompressible
	bounds              thermo.Bounds
	freezes             string // what the lower bound of temperature is
	boiling             boiling
	boilsBelow          float64 // Pa; from there on it boils beyond the range
	deviations          []deviation
	u                   float64 // standard uncertainty of the mass fraction
	densitySlope, slope cubic   // ∂ρ/∂x and ∂cp/∂x
}

// Name gives the concentration in the way it was stated: by mass, or as
// "vol %" by volume.
func (m *mixture) Name() string { return m.name }

func (m *mixture) Source() string {
	return "Melinder, Properties of Secondary Working Fluids for Indirect Systems, IIR 2010"
}

func (m *mixture) Phase() thermo.Phase   { return thermo.Liquid }
func (m *mixture) Bounds() thermo.Bounds { return m.bounds }

// MolarMass is 0: the source gives the mixture by mass.
func (m *mixture) MolarMass() float64 { return 0 }

// Uncertainty is the root sum of squares of what the polynomials leave open at T, of
// the stated uncertainty of the mass fraction, by the slope of cp and density at
// that state, and of what an incompressible fluid leaves out of cp at p, over √3.
func (m *mixture) Uncertainty(T, p float64) (cp, density float64) {
	cp, density = fitUncertainty(m.deviations, T)
	byCp, byDensity := m.Strength(T, p)
	cp = math.Hypot(cp, byCp)
	cp = math.Hypot(cp, m.stiff.CpChange(p)/m.cp.at(T-m.base)/math.Sqrt(3))
	return cp, math.Hypot(density, byDensity)
}

// Strength is by the slopes of the polynomials at that state. With more of a glycol or a
// salt the density rises and cp falls, and what is left of the product is from next to
// nothing to 0.98 of the greater one; with more of an alcohol both fall over most of the
// range, with more ammonia at times both rise.
func (m *mixture) Strength(T, p float64) (cp, density float64) {
	t := T - m.base
	return m.u * m.slope.at(t) / m.cp.at(t), m.u * m.densitySlope.at(t) / m.density.at(t)
}

// Span returns the temperature at which ice may form and a temperature at p in Pa
// below which the mixture does not boil.
//
// The lower end is the freezing point of a mixture weaker by twice the standard
// uncertainty of the mass fraction: what is vaguely known is taken to freeze
// early. For the upper end see the package's boiling bounds: water's boiling point,
// or for the volatile solutes that of the pure alcohol or the bubble point.
func (m *mixture) Span(p float64) (lo, hi float64) {
	lo = m.bounds.MinT
	if !(p >= m.bounds.MinP) {
		return lo, lo
	}
	// Above the range it boils later still, and beyond the range either way.
	return lo, max(lo, m.boiling.temperature(min(p, maxPressure)))
}

func (m *mixture) At(T, p float64) (thermo.Properties, error) {
	if err := m.bounds.Check(m.name, T, p, m.why(T)); err != nil {
		return thermo.Properties{}, err
	}
	if p < m.boilsBelow {
		if _, hi := m.Span(p); T > hi {
			return thermo.Properties{}, m.boils(T, hi)
		}
	}
	t := T - m.base
	cp, rho := m.cp.at(t), m.density.at(t)
	return m.stiff.Properties(p, m.cp.integral(t), cp, rho), nil
}

// PressureLaw is that of an incompressible fluid.
func (m *mixture) PressureLaw() thermo.PressureLaw { return m.stiff.PressureLaw() }

func (m *mixture) why(T float64) string {
	if T < m.bounds.MinT {
		return m.freezes
	}
	return "range of the polynomials"
}

func (m *mixture) boils(T, bound float64) error {
	return &thermo.RangeError{Fluid: m.name, Quantity: "temperature", Value: T, Bound: bound, Why: m.boiling.why()}
}
