package aqueous

import (
	"fmt"
	"strings"

	"heatreeve/thermo"
	"heatreeve/thermo/unit/near"
)

// Solutes returns the names that New knows.
func Solutes() []string {
	var out []string
	for _, s := range solutes {
		out = append(out, s.name)
	}
	return out
}

// maxFractionUncertainty is more than anyone who has measured the mixture may
// leave open.
const maxFractionUncertainty = 0.1

// New returns the mixture of water and a mass fraction of solute (kg per kg of
// mixture, 0 to 0.6) that is known with the given standard uncertainty, also as a mass
// fraction and at most 0.1. The error names an unknown solute and those like
// it, or the figure that is out of range.
func New(solute string, massFraction, massFractionUncertainty float64) (thermo.Fluid, error) {
	s, err := lookup(solute)
	if err != nil {
		return nil, err
	}
	if !(massFraction >= 0 && massFraction <= maxFraction) {
		return nil, fmt.Errorf("%s of mass fraction %g; the polynomials hold from 0 to %g", solute, massFraction, maxFraction)
	}
	if u := massFractionUncertainty; !(u >= 0 && u <= maxFractionUncertainty) {
		return nil, fmt.Errorf("%s: uncertainty of the mass fraction is %g; it lies from 0 to %g", solute, u, maxFractionUncertainty)
	}
	return s.mix(massFraction, massFractionUncertainty), nil
}

func lookup(name string) (*solute, error) {
	for k := range solutes {
		if solutes[k].name == name {
			return &solutes[k], nil
		}
	}
	hint := ""
	if guess := near.Names(name, Solutes()); len(guess) > 0 {
		hint = fmt.Sprintf(", did you mean %q", guess[0])
	}
	return nil, fmt.Errorf("unknown solute %q%s; known solutes: %s", name, hint, strings.Join(Solutes(), ", "))
}
