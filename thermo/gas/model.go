package gas

import (
	"fmt"
	"strings"

	"heatreeve/thermo"
	"heatreeve/thermo/unit/near"
)

// Model is how the properties of a gas are found.
type Model uint8

const (
	Best         Model = iota // the best of the others for the gas and the state
	Ideal                     // NASA-9 alone
	PengRobinson              // NASA-9 and the equation of state of Peng and Robinson
	Reference                 // the reference equation of state of one gas, or of dry air
)

var modelNames = [...]string{Best: "best", Ideal: "ideal", PengRobinson: "peng-robinson", Reference: "reference"}

func (m Model) String() string {
	if int(m) < len(modelNames) {
		return modelNames[m]
	}
	return fmt.Sprintf("Model(%d)", uint8(m))
}

// Models returns the names of the models, as [ParseModel] takes them.
func Models() []string { return append([]string(nil), modelNames[:]...) }

// ParseModel returns the model of that name, in any case and with spaces for hyphens; the
// empty name is [Best]. The error names those like it and all.
func ParseModel(s string) (Model, error) {
	if s == "" {
		return Best, nil
	}
	word := strings.NewReplacer(" ", "-", "_", "-").Replace(strings.ToLower(strings.TrimSpace(s)))
	for k, name := range modelNames {
		if word == name {
			return Model(k), nil
		}
	}
	hint := ""
	if guess := near.Names(word, modelNames[:]); len(guess) > 0 {
		hint = ", did you mean " + strings.Join(guess, " or ")
	}
	return 0, fmt.Errorf("unknown model %q%s; models of a gas: %s", s, hint, strings.Join(modelNames[:], ", "))
}

// by makes the fluid.
func (c composition) by(model Model) (thermo.Fluid, error) {
	switch model {
	case Ideal:
		return newMixture(c), nil
	case PengRobinson:
		return newCubic(c), nil
	case Reference:
		return newReference(c)
	case Best:
		return newBest(c), nil
	}
	return nil, fmt.Errorf("unknown model %v of a gas; models: %s", model, strings.Join(Models(), ", "))
}
