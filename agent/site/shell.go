package site

import (
	"strings"

	"heatreeve/thermo/solid"
	"heatreeve/thermo/unit"
)

const shellForms = "want a mass of a solid such as 500 kg steel, or a heat capacity such as 40 kJ/K"

// heatCapacity reads the heat capacity of a wall in J/K: as it is, or as a mass of a named
// solid, whose specific heat is taken at T in K or, where it has none there, at the end of
// its range. It is 0 where there is a fault.
func (v value) heatCapacity(T float64) float64 {
	s, ok := v.text()
	if !ok {
		return 0
	}
	mass, name, ok := massOf(s)
	if !ok {
		return v.plainCapacity(s)
	}
	if mass.SI() <= 0 {
		v.fault("%v is not above zero", mass)
		return 0
	}
	f, err := solid.New(name)
	if err != nil {
		v.fault("%v", err)
		return 0
	}
	b := f.Bounds()
	x, err := f.At(min(max(T, b.MinT), b.MaxT), atmosphere)
	if err != nil {
		v.fault("%v", err)
	}
	return mass.SI() * x.Cp
}

// plainCapacity reads a heat capacity that is written as such.
func (v value) plainCapacity(s string) float64 {
	q, err := unit.ParseAs(s, unit.HeatCapacity, unit.Mass)
	switch {
	case err != nil:
		v.fault("%v; %s", err, shellForms)
	case q.Unit.Dimension == unit.Mass:
		v.fault("%v of what? %s", q, shellForms)
	case q.SI() <= 0:
		v.fault("%v is not above zero", q)
	default:
		return q.SI()
	}
	return 0
}

// mostOfMass is how many words a mass takes: "1 000 000 short ton (US)" has six.
const mostOfMass = 8

// massOf parts "120 kg steel" into the mass and what it is of: the longest beginning that
// is a mass, and at least a word behind it.
func massOf(s string) (mass unit.Quantity, name string, ok bool) {
	words := strings.Fields(s)
	for n := min(len(words)-1, mostOfMass); n > 0; n-- {
		q, err := unit.ParseAs(strings.Join(words[:n], " "), unit.Mass)
		if err == nil {
			return q, strings.Join(words[n:], " "), true
		}
	}
	return unit.Quantity{}, "", false
}
