// Package helmholtz holds reference equations of state of pure gases.
package helmholtz

import (
	"strings"

	"heatreeve/thermo"
)

// pure lists the pure substances, those of dry air first.
var pure = []*substance{
	&nitrogen, &oxygen, &argon, &carbonDioxide, &carbonMonoxide, &methane, &ethane,
	&propane, &butane, &hydrogen, &helium, &ammonia,
}

// Formulas returns the formulas that New knows.
func Formulas() []string {
	var out []string
	for _, s := range pure {
		out = append(out, s.formula)
	}
	return out
}

// find knows formulas in any case, and n-butane with its prefix.
func find(formula string) (*substance, bool) {
	for _, s := range pure {
		if strings.EqualFold(formula, s.formula) || strings.EqualFold(formula, "n-"+s.formula) && s == &butane {
			return s, true
		}
	}
	return nil, false
}

// New returns the gas of a formula such as "CO2", in any case; ok is false for
// one that is not in [Formulas].
func New(formula string) (f thermo.Fluid, ok bool) {
	s, ok := find(formula)
	if !ok {
		return nil, false
	}
	return gas(s), true
}

// Air returns dry air.
func Air() thermo.Fluid { return gas(&dryAir) }

// Liquid returns the liquid of a formula, for all of [Formulas] but helium.
func Liquid(formula string) (f thermo.Fluid, ok bool) {
	s, ok := find(formula)
	if !ok || s == &helium {
		return nil, false
	}
	return liquid(s), true
}
