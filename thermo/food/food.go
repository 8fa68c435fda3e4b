// Package food holds liquid food by its composition: milk, cream, wort, juice.
//
// cp and density are the polynomials of Choi and Okos (1986) for water, protein, fat,
// carbohydrate, fibre and ash, as the ASHRAE Handbook Refrigeration tabulates them, put
// together by mass for cp and by volume for density, without pores or foam:
//
//	cp(T) = Σ x_i cp_i(T),   1/ρ(T) = Σ x_i / ρ_i(T)
//
// The range is 0 °C to 150 °C as a liquid: a watery food freezes a little below 0 °C and
// boils a little above the boiling point of water at its pressure, so that both ends are on
// the safe side.
//
// Found: the water polynomial itself has 2.1 % less cp than IAPWS-IF97 at 0 °C, 1.3 % less
// at 20 °C, 0.95 % at 60 °C to 95 °C and 1.7 % at 150 °C. The published equations are kept;
// the deviation goes into the uncertainty. Handbook values of whole and skim milk (cp 3.89
// and 3.94 kJ/(kg K), from memory) lie 1.2 % and 0.8 % above ours.
//
// The food is taken for incompressible: cv is cp, and the enthalpy keeps its pressure term,
// that of 60 °C at every temperature so that (∂h/∂T)p is cp and nothing else:
//
//	h(T, p) = ∫ cp dT + (p − 101325 Pa) · (v − T dv/dT)
//
// Not modelled: freezing and ice, the melting of fat (milk fat takes up some 80 kJ/kg
// between 0 °C and 40 °C, from memory; in cream that is no small matter), dissolved or
// entrained gas, and all that cooking changes.
package food

import (
	"math"

	"heatreeve/thermo"
	"heatreeve/thermo/water"
)

const (
	zeroC             = 273.15 // K
	minT, maxT        = 273.15, 423.15
	minPressure       = 611.2127 // Pa: below it water boils at its freezing point
	maxPressure       = 2.5e6    // Pa
	referencePressure = 101325.0 // Pa, where the pressure term is zero
	referenceT        = 333.15   // K, where the pressure term is taken
)

// quadratic is a polynomial in °C, lowest power first.
type quadratic [3]float64

func (c *quadratic) at(t float64) float64       { return c[0] + t*(c[1]+t*c[2]) }
func (c *quadratic) integral(t float64) float64 { return t * (c[0] + t*(c[1]/2+t*c[2]/3)) }
func (c *quadratic) slope(t float64) float64    { return c[1] + 2*t*c[2] }

type component struct{ cp, density quadratic }

// The components of Y. Choi, M. R. Okos, Effects of temperature and composition on the
// thermal properties of foods (1986), as tabulated in ASHRAE Handbook Refrigeration,
// chapter Thermal Properties of Foods: cp in J/(kg K), density in kg/m³, t in °C; -40 °C to
// 150 °C, water 0 °C to 150 °C.
var (
	waterPart    = component{quadratic{4128.9, -0.090864, 0.0054731}, quadratic{997.18, 0.0031439, -0.0037574}}
	protein      = component{quadratic{2008.2, 1.2089, -0.0013129}, quadratic{1329.9, -0.5184}}
	fat          = component{quadratic{1984.2, 1.4733, -0.0048008}, quadratic{925.59, -0.41757}}
	carbohydrate = component{quadratic{1548.8, 1.9625, -0.0059399}, quadratic{1599.1, -0.31046}}
	fibre        = component{quadratic{1845.9, 1.8306, -0.0046509}, quadratic{1311.5, -0.36589}}
	ash          = component{quadratic{1092.6, 1.8896, -0.0036817}, quadratic{2423.8, -0.28063}}
)

// part is a component and its mass fraction.
type part struct {
	fraction float64
	density  quadratic
}

type mixture struct {
	name, source string
	cp           quadratic // of the whole, J/(kg K)
	parts        []part    // those that there are
	water        float64   // mass fraction
	pressureTerm float64   // m³/kg
	boilsBelow   float64   // Pa; from there on water boils beyond the range
}

func (m *mixture) Name() string        { return m.name }
func (m *mixture) Source() string      { return m.source }
func (m *mixture) Phase() thermo.Phase { return thermo.Liquid }

func (m *mixture) Bounds() thermo.Bounds {
	return thermo.Bounds{MinT: minT, MaxT: maxT, MinP: minPressure, MaxP: maxPressure}
}

// MolarMass is 0: a food has none to speak of.
func (m *mixture) MolarMass() float64 { return 0 }

// Span returns 0 °C, and the boiling point of water at p.
func (m *mixture) Span(p float64) (lo, hi float64) {
	if !(p >= minPressure) {
		return minT, minT
	}
	hi, err := water.SaturationTemperature(min(p, maxPressure)) // beyond the range above that
	if err != nil {
		return minT, minT
	}
	return minT, max(minT, hi)
}

func (m *mixture) At(T, p float64) (thermo.Properties, error) {
	if err := m.Bounds().Check(m.name, T, p, why(T)); err != nil {
		return thermo.Properties{}, err
	}
	if p < m.boilsBelow {
		if _, hi := m.Span(p); T > hi {
			return thermo.Properties{}, m.boils(T, hi)
		}
	}
	t := T - zeroC
	cp, rho := m.cp.at(t), 1/m.volume(t)
	h := m.cp.integral(t) + (p-referencePressure)*m.pressureTerm
	return thermo.Properties{Enthalpy: h, InternalEnergy: h - p/rho, Cp: cp, Cv: cp, Density: rho}, nil
}

func why(T float64) string {
	if T < minT {
		return "freezing point of water; the food freezes a little lower"
	}
	return "range of Choi and Okos"
}

func (m *mixture) boils(T, bound float64) error {
	return &thermo.RangeError{
		Fluid: m.name, Quantity: "temperature", Value: T, Bound: bound,
		Why: "boiling point of water at this pressure; the food boils a little later",
	}
}

// volume is 1/ρ in m³/kg at t in °C.
func (m *mixture) volume(t float64) (v float64) {
	for k := range m.parts {
		v += m.parts[k].fraction / m.parts[k].density.at(t)
	}
	return v
}

// expansion is dv/dT in m³/(kg K) at t in °C.
func (m *mixture) expansion(t float64) (slope float64) {
	for k := range m.parts {
		rho := m.parts[k].density.at(t)
		slope -= m.parts[k].fraction * m.parts[k].density.slope(t) / (rho * rho)
	}
	return slope
}

// deviations are how far the water polynomials are from IAPWS-IF97, as fractions: measured
// at 1 atm, beyond 100 °C at saturation.
var deviations = [...]struct{ t, cp, density float64 }{
	{0, 0.0215, 0.0029}, {5, 0.0182, 0.0029}, {10, 0.0160, 0.0029}, {20, 0.0133, 0.0026}, {40, 0.0108, 0.0011}, {60, 0.0096, 0.0009},
	{80, 0.0094, 0.0018}, {95, 0.0099, 0.0018}, {120, 0.0118, 0.0012}, {135, 0.0139, 0.0018}, {150, 0.0167, 0.0043},
}

// Half-widths of what the dry components leave open, as fractions: cp by the errors that
// Choi and Okos gave for their fits, up to 6 % (from memory); density by that of milk, 0.6
// % to 0.7 % above ours at a tenth of solids (from memory).
const dryCp, dryDensity = 0.06, 0.08

// Uncertainty puts two half-widths together, for water its deviation from IAPWS-IF97 at T,
// for the rest 6 % of cp and 8 % of density, each by its share of the food's cp or volume,
// and takes the sum for rectangular: u = half-width/√3.
func (m *mixture) Uncertainty(T, p float64) (cp, density float64) {
	t := min(max(T-zeroC, 0), maxT-zeroC)
	k := 1
	for k < len(deviations)-1 && deviations[k].t < t {
		k++
	}
	a, b := &deviations[k-1], &deviations[k]
	u := (t - a.t) / (b.t - a.t)
	shareCp := m.water * waterPart.cp.at(t) / m.cp.at(t)
	shareVolume := m.water / waterPart.density.at(t) / m.volume(t)
	cp = shareCp*(a.cp+u*(b.cp-a.cp)) + (1-shareCp)*dryCp
	density = shareVolume*(a.density+u*(b.density-a.density)) + (1-shareVolume)*dryDensity
	return cp / math.Sqrt(3), density / math.Sqrt(3)
}
