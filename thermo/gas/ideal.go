package gas

import (
	"math"

	"heatreeve/thermo"
)

const (
	minT = 200.0  // K, where the polynomials begin
	maxT = 2000.0 // K
	minP = 1.0    // Pa; below it the molecules of a gas meet the wall of a pipe before one another
	seam = 1000.0 // K, where the two ranges of the polynomials meet
	zero = 298.15 // K, where the enthalpy of every ideal gas here is 0
)

const nasa = "NASA/TP-2002-211556 (NASA-9 polynomials)"

// polynomials are those of a mixture, with the zero of enthalpy at 298.15 K.
type polynomials struct {
	molarMass float64 // kg/mol
	r         float64 // R/M, J/(kg K)
	low, high range9
}

func mix(parts []component) polynomials {
	var m polynomials
	for _, c := range parts {
		m.molarMass += c.share * c.molarMass
		m.low.add(c.low, c.share)
		m.high.add(c.high, c.share)
	}
	m.r = thermo.R / m.molarMass
	m.setZero()
	return m
}

func (r *range9) add(o range9, share float64) {
	for k := range r.a {
		r.a[k] += share * o.a[k]
	}
	r.b += share * o.b
}

// setZero moves the zero of enthalpy from the formation enthalpy to 298.15 K, and the
// upper range so that it meets the lower one without a step.
func (m *polynomials) setZero() {
	_, h := m.low.at(zero)
	m.low.b -= h * zero
	_, below := m.low.at(seam)
	_, above := m.high.at(seam)
	m.high.b -= (above - below) * seam
}

// at returns cp/R and h/(RT).
func (m *polynomials) at(T float64) (cp, h float64) {
	if T > seam {
		return m.high.at(T)
	}
	return m.low.at(T)
}

// at returns cp/R and h/(RT).
func (r *range9) at(T float64) (cp, h float64) {
	a, i := &r.a, 1/T
	cp = (a[0]*i+a[1])*i + a[2] + T*(a[3]+T*(a[4]+T*(a[5]+T*a[6])))
	h = (a[1]*math.Log(T)-a[0]*i+r.b)*i + a[2] + T*(a[3]/2+T*(a[4]/3+T*(a[5]/4+T*(a[6]/5))))
	return cp, h
}

// mixture is an ideal gas.
type mixture struct {
	polynomials
	name     string
	bounds   thermo.Bounds
	fit      fit
	parts    []part
	covolume float64 // m³/mol
	vapours  vapours
}

func newMixture(c composition) *mixture {
	m := &mixture{polynomials: mix(c.parts), name: c.name, fit: fitOf(c.parts), parts: partsOf(c.parts)}
	m.bounds = thermo.Bounds{MinT: minT, MaxT: maxT, MinP: minP, MaxP: idealMaxP(c.parts)}
	for _, p := range c.parts {
		m.covolume += p.share * critical[p.formula].covolume()
	}
	m.vapours = vapoursOf(c.parts, m.bounds.MaxP)
	return m
}

func (m *mixture) Name() string          { return m.name }
func (m *mixture) Source() string        { return nasa + ", ideal gas" }
func (m *mixture) Phase() thermo.Phase   { return thermo.Gas }
func (m *mixture) Bounds() thermo.Bounds { return m.bounds }
func (m *mixture) MolarMass() float64    { return m.molarMass }

// massU is the relative standard uncertainty of a molar mass, and so of the density of an
// ideal gas.
const massU = 3e-5

// Uncertainty joins that of the polynomials with what the ideal gas may be off by at
// the state: the deviations of its parts, weighed by mole fraction, and in the density 1.2 times the
// volume that the molecules fill, which remains when it is hot. A deviation that may lie
// anywhere up to its largest value has that value over √3. An uncertain composition is not in it.
func (m *mixture) Uncertainty(T, p float64) (cp, density float64) {
	density = 1.2 * m.covolume * p / (thermo.R * T)
	for k := range m.parts {
		c, d := m.parts[k].at(T)
		cp += m.parts[k].share * c * p
		density += m.parts[k].share * d * p
	}
	return math.Hypot(cp/math.Sqrt(3), m.fit.at(T)), math.Hypot(density/math.Sqrt(3), massU)
}

// Span returns the temperature at which the first component condenses,
// freezes out or pairs at p, 0 where none does above 200 K, and +Inf.
func (m *mixture) Span(p float64) (lo, hi float64) {
	lo, _ = m.vapours.dewPoint(p)
	return lo, math.Inf(1)
}

func (m *mixture) At(T, p float64) (thermo.Properties, error) {
	if err := m.bounds.Check(m.name, T, p, "range of the ideal gas"); err != nil {
		return thermo.Properties{}, err
	}
	if !m.vapours.clear(T, p) && !m.vapours.dry(T, p) {
		if d, formula := m.vapours.dewPoint(p); T < d {
			return thermo.Properties{}, tooCold(m.name, T, d, dewOf(formula))
		}
	}
	cp, h := m.at(T)
	rt := m.r * T
	return thermo.Properties{
		Enthalpy:       rt * h,
		InternalEnergy: rt * (h - 1),
		Cp:             m.r * cp,
		Cv:             m.r * (cp - 1),
		Density:        p / rt,
	}, nil
}

func tooCold(name string, T, bound float64, why string) error {
	return &thermo.RangeError{Fluid: name, Quantity: "temperature", Value: T, Bound: bound, Below: true, Why: why}
}

func dewOf(formula string) string {
	if formula == "NO2" {
		return "pairing to N2O4, or dew point, of NO2"
	}
	return "dew or frost point of " + formula
}
