package gas

import (
	"fmt"
	"slices"
	"strings"
	"sync"

	"heatreeve/thermo/unit/near"
)

// ingredient is a species, or dry air, under the name by which mixtures call it.
type ingredient struct {
	formula, name string
	parts         []component
}

// component of a mixture; share is its mole fraction.
type component struct {
	*species
	share float64
}

// airParts are the composition of the species Air in the NASA file (Gordon 1982).
var airParts = []struct {
	formula string
	share   float64
}{{"N2", 0.78084}, {"O2", 0.209476}, {"Ar", 0.009365}, {"CO2", 0.000319}}

const dryAir = "dry air"

// ingredients are all gases that a mixture may be made of.
var ingredients = sync.OnceValue(func() []ingredient {
	byFormula := map[string]*species{}
	var out []ingredient
	for k := range table {
		s := &table[k]
		byFormula[s.formula] = s
		out = append(out, ingredient{s.formula, s.name, []component{{s, 1}}})
	}
	air := ingredient{formula: dryAir, name: dryAir}
	for _, c := range airParts {
		air.parts = append(air.parts, component{byFormula[c.formula], c.share})
	}
	return append(out, air)
})

// otherNames are names in use beside the one in the table.
var otherNames = map[string][]string{
	dryAir:  {"air"},
	"H2O":   {"water", "steam"},
	"C4H10": {"butane", "n-C4H10"},
	"C5H12": {"pentane", "n-C5H12"},
	"C2H4":  {"ethene"},
	"NO":    {"nitrogen monoxide"},
	"HCl":   {"hydrochloric acid gas"},
}

// spelling brings a name into the form under which it is looked up.
func spelling(s string) string {
	return alike.Replace(strings.ToLower(s))
}

var alike = strings.NewReplacer(" ", "", "-", "", "_", "", "sulph", "sulf", "vapor", "vapour", "vapour", "vapour",
	"₂", "2", "₃", "3", "₄", "4", "₅", "5", "₆", "6", "₈", "8", "₁₀", "10", "₁₂", "12", "₁", "1", "₀", "0")

// names maps every spelling to its ingredient.
var names = sync.OnceValue(func() map[string]*ingredient {
	out := map[string]*ingredient{}
	all := ingredients()
	for k := range all {
		for _, w := range all[k].words() {
			out[spelling(w)] = &all[k]
		}
	}
	return out
})

func (i *ingredient) words() []string {
	return append([]string{i.formula, i.name}, otherNames[i.formula]...)
}

func (i *ingredient) molarMass() float64 {
	var sum float64
	for _, c := range i.parts {
		sum += c.share * c.molarMass
	}
	return sum
}

// Species returns the formulas of the gases that a mixture may be made of, beside dry air.
func Species() []string {
	var out []string
	for _, s := range table {
		out = append(out, s.formula)
	}
	return out
}

// lookup finds a gas by formula or name, whatever its case, spaces and hyphens.
func lookup(word string) (*ingredient, error) {
	if i, ok := names()[spelling(word)]; ok {
		return i, nil
	}
	hint := ""
	if guess := meant(word); len(guess) > 0 {
		hint = ", did you mean " + strings.Join(guess, " or ")
	}
	return nil, fmt.Errorf("unknown gas %q%s; known gases: %s", word, hint, strings.Join(append(Species(), dryAir), ", "))
}

// meant lists the gases whose formula or name a word may have been meant to be.
func meant(word string) []string {
	gas := map[string]string{}
	var words []string
	for _, i := range ingredients() {
		for _, w := range i.words() {
			gas[w] = fmt.Sprintf("%q (%s)", i.formula, i.name)
			words = append(words, w)
		}
	}
	var out []string
	for _, w := range near.Names(word, words) {
		if !slices.Contains(out, gas[w]) {
			out = append(out, gas[w])
		}
	}
	return out
}
