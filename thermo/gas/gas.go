// Package gas holds ideal gases and their mixtures by the NASA-9 polynomials.
//
// A gas here is ideal: its enthalpy and cp depend on temperature alone, its
// density is pM/(RT) and cp − cv = R/M. What that leaves out grows with
// pressure, so each gas has a pressure above which it is refused: where, at
// 300 K, the ideal cp would miss the real one by 1.5 % or the ideal density by
// 2 %, but never below 120 kPa and never above 3 MPa. For dry air that is
// 944 kPa. Mixtures weigh the deviations of their components by mole fraction.
// Hot gases are far closer to ideal than the limit supposes; below 300 K they
// are less so. [thermo.Fluid.Uncertainty] covers pressures up to the limit: at
// atmospheric pressure the common gases are several times better than it says.
//
// The range is 200 K to 2000 K. The polynomials run to 6000 K, but were checked
// to 1500 K, and composition is frozen: no dissociation of hot flue gas, no
// cracking of fuels. A mixture is refused below the temperature where its
// first component would condense or freeze out.
package gas

import (
	"math"

	"heatreeve/thermo"
)

const (
	minT = 200.0  // K, where the polynomials begin
	maxT = 2000.0 // K
	seam = 1000.0 // K, where the two ranges of the polynomials meet
	zero = 298.15 // K, where the enthalpy of every gas here is 0
)

// mixture is an ideal gas whose coefficients are already those of the mixture.
type mixture struct {
	name         string
	molarMass    float64 // kg/mol
	r            float64 // R/M, J/(kg K)
	low, high    range9
	bounds       thermo.Bounds
	cpU, rhoU    float64
	vapours      []vapour
	lastDewPoint float64 // K, the highest dew point at any allowed pressure
}

func (m *mixture) Name() string          { return m.name }
func (m *mixture) Source() string        { return "NASA/TP-2002-211556 (NASA-9 polynomials), ideal gas" }
func (m *mixture) Phase() thermo.Phase   { return thermo.Gas }
func (m *mixture) Bounds() thermo.Bounds { return m.bounds }
func (m *mixture) MolarMass() float64    { return m.molarMass }

// Uncertainty joins that of the polynomials with what the ideal gas may be off by,
// anywhere up to the highest pressure allowed: 0.9 % in cp and 0.15 % in density
// for dry air. An uncertain composition is not in it.
func (m *mixture) Uncertainty(T, p float64) (cp, density float64) { return m.cpU, m.rhoU }

// Span returns the temperature at which the first component condenses or
// freezes out at p, 0 where none does above 200 K, and +Inf. Water by IAPWS-IF97,
// ice and carbon dioxide snow by a sublimation line within half a kelvin,
// ethane, propane, ammonia and sulfur dioxide by corresponding states within
// 1.5 K at atmospheric pressure. Acids are not modelled: the acid dew point of
// a flue gas with sulfur lies far above that of water.
func (m *mixture) Span(p float64) (lo, hi float64) {
	lo, _ = m.dewPoint(p)
	return lo, math.Inf(1)
}

func (m *mixture) dewPoint(p float64) (T float64, formula string) {
	if !(p > 0) {
		return 0, ""
	}
	for _, v := range m.vapours {
		if d := v.dewPoint(p); d > T {
			T, formula = d, v.formula
		}
	}
	return T, formula
}

func (m *mixture) At(T, p float64) (thermo.Properties, error) {
	if err := m.bounds.Check(m.name, T, p, "range of the ideal gas"); err != nil {
		return thermo.Properties{}, err
	}
	if T < m.lastDewPoint {
		if d, formula := m.dewPoint(p); T < d {
			return thermo.Properties{}, m.wet(T, d, formula)
		}
	}
	part := &m.low
	if T > seam {
		part = &m.high
	}
	cp, h := part.at(T)
	rt := m.r * T
	return thermo.Properties{
		Enthalpy:       rt * h,
		InternalEnergy: rt * (h - 1),
		Cp:             m.r * cp,
		Cv:             m.r * (cp - 1),
		Density:        p / rt,
	}, nil
}

func (m *mixture) wet(T, bound float64, formula string) error {
	return &thermo.RangeError{
		Fluid: m.name, Quantity: "temperature", Value: T, Bound: bound, Below: true,
		Why: "dew or frost point of " + formula,
	}
}

// at returns cp/R and h/(RT).
func (r *range9) at(T float64) (cp, h float64) {
	a, i := &r.a, 1/T
	cp = (a[0]*i+a[1])*i + a[2] + T*(a[3]+T*(a[4]+T*(a[5]+T*a[6])))
	h = (a[1]*math.Log(T)-a[0]*i+r.b)*i + a[2] + T*(a[3]/2+T*(a[4]/3+T*(a[5]/4+T*(a[6]/5))))
	return cp, h
}
