package gas

import (
	"math"

	"heatreeve/thermo"
)

const pengRobinson = "Peng and Robinson, Ind. Eng. Chem. Fundam. 15 (1976) 59, kij = 0, with "

// cubic is a gas by Peng and Robinson, with the polynomials for its ideal part.
type cubic struct {
	name    string
	ideal   polynomials
	one     fluid1
	fit     fit
	polar   float64 // mole fraction of polar gases
	dipoles []part  // the polar gases
	pairs   float64 // what unlike molecules may add to the error of the residual, as a fraction of it
	warm    float64 // K, from where on every pressure is let pass
	coldP   float64 // Pa, pressure up to which the equation is trusted at the critical temperature
	vapours vapours
}

// warm is the reduced temperature from which plain gases are trusted at every pressure.
const warm = 1.3

// polar gases are those which hold together by more than size and attraction. The dipole of nitric
// oxide is too small.
var polar = map[string]bool{"H2O": true, "NH3": true, "SO2": true, "HCl": true, "NO2": true}

var cubicBounds = thermo.Bounds{MinT: minT, MaxT: maxT, MinP: minP, MaxP: 10e6}

func newCubic(c composition) *cubic {
	m := &cubic{name: c.name, ideal: mix(c.parts), one: oneFluid(c.parts), fit: fitOf(c.parts)}
	same := 0.0
	for _, p := range c.parts {
		same += p.share * p.share
		if polar[p.formula] {
			m.polar += p.share
			m.dipoles = append(m.dipoles, partsOf([]component{p})...)
		}
	}
	mixed := m.polar * (1 - m.polar)
	m.pairs = 0.1*(1-same) + 1.6*mixed
	m.warm = (warm + 0.6*mixed) * m.one.T
	m.coldP = (0.6 - 0.4*m.polar - 0.8*mixed) * m.one.p
	m.vapours = vapoursOf(c.parts, cubicBounds.MaxP)
	return m
}

func (m *cubic) Name() string          { return m.name }
func (m *cubic) Source() string        { return pengRobinson + nasa }
func (m *cubic) Phase() thermo.Phase   { return thermo.Gas }
func (m *cubic) Bounds() thermo.Bounds { return cubicBounds }
func (m *cubic) MolarMass() float64    { return m.ideal.molarMass }

// coldest is the temperature in K below which the equation is not trusted at p in Pa: where
//
//	p = c·pc·(T/Tc)^5.3
//
// with the critical point of the one fluid, and 1.3 Tc at most. c is 0.6 for gases without a
// dipole, whose dew point lies above this up to some 0.75 Tc, and 0.2 for polar ones; where the
// two meet both limits are higher. cp may be off by 5 to 15 % at the limit. The uncertainty says
// so; it is above 15 % only where polar and other gases meet near 100 bar.
func (m *cubic) coldest(p float64) float64 {
	return min(math.Pow(p/m.coldP, 1/5.3)*m.one.T, m.warm)
}

// Span returns, for the lower side, the higher of the temperature at which the first component
// condenses, freezes out or pairs at p, and the one below which the equation is not
// trusted; and +Inf.
func (m *cubic) Span(p float64) (lo, hi float64) {
	lo, _ = m.limit(p)
	return lo, math.Inf(1)
}

func (m *cubic) limit(p float64) (T float64, formula string) {
	T, formula = m.vapours.dewPoint(p)
	if c := m.coldest(p); c > T {
		return c, ""
	}
	return T, formula
}

func (m *cubic) At(T, p float64) (thermo.Properties, error) {
	if err := m.check(T, p); err != nil {
		return thermo.Properties{}, err
	}
	cp, h := m.ideal.at(T)
	res := m.one.at(T, p)
	r, rt := m.ideal.r, m.ideal.r*T
	return thermo.Properties{
		Enthalpy:       rt * (h + res.h),
		InternalEnergy: rt * (h + res.h - res.z),
		Cp:             r * (cp + res.cp),
		Cv:             r * (cp - 1 + res.cv),
		Density:        p / (res.z * rt),
	}, nil
}

func (m *cubic) check(T, p float64) error {
	if err := cubicBounds.Check(m.name, T, p, "range of Peng-Robinson"); err != nil {
		return err
	}
	if (T >= m.warm || T >= m.coldest(p)) && (m.vapours.clear(T, p) || m.vapours.dry(T, p)) {
		return nil
	}
	lo, formula := m.limit(p)
	switch {
	case T >= lo:
		return nil
	case formula == "":
		return tooCold(m.name, T, lo, "too near to condensing for Peng-Robinson at this pressure")
	}
	return tooCold(m.name, T, lo, dewOf(formula))
}

// Uncertainty holds all deviations from the reference equations of 12 gases, of air
// and, for water, from IAPWS-IF97 within twice its size. It takes a fraction of the residual of cp and
// of the covolume's part in the density: 0.2 of the residual and 4 % (polar gases 35 %
// more) of B = bp/(RT) in cp, 0.55 B in density, both growing below 1.3 times the critical
// temperature. Polar gases add what their own pairs make of the ideal gas and the equation misses,
// see [cubic.missed]. For mixtures comes what kij = 0 may be off by (an estimate, no source): up
// to 0.1 of both residuals between plain gases, up to 0.4 between plain and polar ones. All that
// over √3, and joined with the ideal part. An uncertain composition is not in it.
func (m *cubic) Uncertainty(T, p float64) (cp, density float64) {
	ideal, _ := m.ideal.at(T)
	res := m.one.at(T, p)
	B := m.one.b * p / (thermo.R * T)
	share, volume := 0.2, 0.55
	if cool := warm * m.one.T / T; cool > 1 {
		share *= math.Pow(cool, 3.4)
		volume *= math.Pow(cool, 2.6)
	}
	cp, density = m.missed(T, p)
	cp += (share+m.pairs)*math.Abs(res.cp)/(ideal+res.cp) + (0.04+0.35*m.polar)*B
	density += volume*B + m.pairs*math.Abs(1-1/res.z)
	return math.Hypot(cp/math.Sqrt(3), m.fit.at(T)), math.Hypot(density/math.Sqrt(3), massU)
}

// missed are the relative deviations from the ideal gas by pairs of like polar molecules that the
// equation does not see. Of a pure polar gas it misses some 85 % at 0.6 of the critical
// temperature, half at the critical temperature and nothing above 1.5 of it (water, ammonia). In a
// mixture they meet with the square of the mole fraction.
func (m *cubic) missed(T, p float64) (cp, density float64) {
	for k := range m.dipoles {
		d := &m.dipoles[k]
		if blind := min(1, 1.5-0.95*T/d.criticalT); blind > 0 {
			c, r := d.at(T)
			meet := blind * d.share * d.share * p
			cp += meet * c
			density += meet * r
		}
	}
	return cp, density
}
