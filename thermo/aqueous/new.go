package aqueous

import (
	"fmt"
	"slices"

	"heatreeve/thermo"
	"heatreeve/thermo/roster"
)

var solutes = slices.Concat(liquids, salts)

// Solutes returns the names of the solutes. [New] knows each in any case, with
// spaces, hyphens or without, and by its formula or a common short name too.
func Solutes() []string {
	var out []string
	for _, s := range solutes {
		out = append(out, s.name)
	}
	return out
}

// Limits say how far the polynomials of a solute reach.
type Limits struct {
	MassFraction   float64 // largest, kg/kg
	VolumeFraction float64 // largest by [NewByVolume]; 0 where the solute comes by mass only
	Eutectic       bool    // the largest is the eutectic
	MaxT           float64 // K
	Aliases        []string
}

// LimitsOf returns the limits of a solute. The error names those like it.
func LimitsOf(solute string) (Limits, error) {
	s, err := lookup(solute)
	if err != nil {
		return Limits{}, err
	}
	l := Limits{MassFraction: s.max, Eutectic: s.eutectic, MaxT: s.maxT, Aliases: slices.Clone(s.aliases)}
	if s.density20 > 0 {
		l.VolumeFraction = s.volumeFraction(s.max)
	}
	return l, nil
}

// maxFractionUncertainty is more than anyone who has measured the mixture may
// leave open.
const maxFractionUncertainty = 0.1

// New returns the mixture of water and a mass fraction of solute (kg per kg of
// mixture, from 0 to the solute's largest) that is known with the given standard
// uncertainty, also as a mass fraction and at most 0.1. Salts count without
// their water of crystallization; one whose strength may pass its eutectic, by twice the
// uncertainty, is refused. The error names an unknown solute and those
// like it, or the figure that is out of range.
func New(solute string, massFraction, massFractionUncertainty float64) (thermo.Fluid, error) {
	s, err := lookup(solute)
	if err != nil {
		return nil, err
	}
	if !(massFraction >= 0 && massFraction <= s.max) {
		return nil, fmt.Errorf("%s of mass fraction %g; %s", s.name, massFraction, s.limit())
	}
	if u := massFractionUncertainty; !(u >= 0 && u <= maxFractionUncertainty) {
		return nil, fmt.Errorf("%s: uncertainty of the mass fraction is %g; it lies from 0 to %g", s.name, u, maxFractionUncertainty)
	}
	if strongest := massFraction + 2*massFractionUncertainty; s.eutectic && strongest > s.max*(1+1e-12) {
		return nil, fmt.Errorf("%s of mass fraction %g may have up to %.4g by twice its uncertainty; %s, and beyond it salt falls out", s.name, massFraction, strongest, s.limit())
	}
	name := fmt.Sprintf("%s %.4g %%", s.name, 100*massFraction)
	return s.mix(name, massFraction, massFractionUncertainty), nil
}

func (s *solute) limit() string {
	if s.eutectic {
		return fmt.Sprintf("the polynomials hold from 0 to the eutectic, %g", s.max)
	}
	return fmt.Sprintf("the polynomials hold from 0 to %g", s.max)
}

// mix works out the polynomials at mass fraction x, known to u.
func (s *solute) mix(name string, x, u float64) *mixture {
	d := x - s.baseX
	m := &mixture{
		name: name, base: s.baseT, freezes: s.freezes(u), boiling: s.boils(x), deviations: s.deviation, u: u,
		density: at(&s.density, d), densitySlope: slopeAt(&s.density, d),
		cp: at(&s.cp, d), slope: slopeAt(&s.cp, d),
	}
	m.bounds = thermo.Bounds{MinT: s.guard(max(0, x-2*u)), MaxT: s.maxT, MinP: m.boiling.minPressure(), MaxP: maxPressure}
	m.boilsBelow = boilsBelow(m.boiling, s.maxT)
	m.stiff = thermo.NewIncompressible((zeroC+s.maxT)/2, s.freezesAt(x), s.maxT, func(T float64) (rho, slope float64) {
		return m.density.at(T - s.baseT), m.density.slope(T - s.baseT)
	})
	return m
}

// also leads from every other name of a solute to its own.
var also = func() map[string]string {
	m := make(map[string]string)
	for k := range solutes {
		for _, alias := range solutes[k].aliases {
			m[alias] = solutes[k].name
		}
	}
	return m
}()

func lookup(name string) (*solute, error) {
	k, err := roster.Find("solute", name, Solutes(), also)
	if err != nil {
		return nil, err
	}
	return &solutes[k], nil
}
