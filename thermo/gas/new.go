package gas

import (
	"cmp"
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"heatreeve/thermo"
)

// sumTolerance is how far the shares may miss 1 in total: the rounding of
// percentages as they are stated.
const sumTolerance = 1e-3

// New returns the gas with the given mole fractions by the model. They are the volume fractions
// of an ideal gas, as analysers and data sheets state them. Gases go by formula or
// name, see [Species], in any case. Shares must be from 0 to 1 and add up to 1 within 0.001; what is
// left of rounding is spread over all in proportion. The error names an unknown gas and those
// like it, one given twice, or the sum.
func New(fractions map[string]float64, model Model) (thermo.Fluid, error) {
	c, err := compose(fractions, "mole fraction")
	if err != nil {
		return nil, err
	}
	return c.by(model)
}

// MoleFractions returns the mole fractions, by formula, of a mixture with the given
// mass fractions: x = (w/M) / Σ(w/M). Names, sum and errors are as for [New].
func MoleFractions(massFractions map[string]float64) (map[string]float64, error) {
	shares, err := ingredientShares(massFractions, "mass fraction")
	if err != nil {
		return nil, err
	}
	var moles float64
	for _, s := range shares {
		moles += s.share / s.molarMass()
	}
	out := map[string]float64{}
	for _, s := range shares {
		out[s.formula] = s.share / s.molarMass() / moles
	}
	return out, nil
}

// DryAir returns dry air: N2 78.084 %, O2 20.9476 %, Ar 0.9365 %, CO2 0.0319 % by
// volume, the composition of the species Air in the NASA file (Gordon 1982),
// 28.9651 g/mol. The error says that the model is none of ours.
func DryAir(model Model) (thermo.Fluid, error) {
	return New(map[string]float64{dryAir: 1}, model)
}

// composition is a mixture as it was named and as it is made up.
type composition struct {
	name  string
	parts []component // their shares make 1
	only  string      // formula of the one ingredient, empty where there are several
}

type ingredientShare struct {
	*ingredient
	share float64
}

func compose(fractions map[string]float64, kind string) (composition, error) {
	shares, err := ingredientShares(fractions, kind)
	if err != nil {
		return composition{}, err
	}
	c := composition{name: describe(shares)}
	if len(shares) == 1 {
		c.only = shares[0].formula
	}
	var total [len(table)]float64
	for _, s := range shares {
		for _, p := range s.parts {
			total[p.index()] += s.share * p.share
		}
	}
	for k, share := range total {
		if share > 0 {
			c.parts = append(c.parts, component{&table[k], share})
		}
	}
	return c, nil
}

// index of the species in the table.
func (s *species) index() int {
	return slices.IndexFunc(table[:], func(o species) bool { return o.formula == s.formula })
}

// ingredientShares are those above zero, in the order of the table, scaled to make 1.
func ingredientShares(fractions map[string]float64, kind string) ([]ingredientShare, error) {
	var out []ingredientShare
	given := map[*ingredient]string{}
	var sum float64
	for _, word := range slices.Sorted(maps.Keys(fractions)) { // one order, so one result to the last bit
		i, err := lookup(word)
		if err != nil {
			return nil, err
		}
		if other, twice := given[i]; twice {
			return nil, fmt.Errorf("%q and %q are the same gas; give %s once", other, word, i.formula)
		}
		given[i] = word
		x := fractions[word]
		if !(x >= 0 && x <= 1) {
			return nil, fmt.Errorf("share of %s is %g; a %s lies from 0 to 1", word, x, kind)
		}
		if sum += x; x > 0 {
			out = append(out, ingredientShare{i, x})
		}
	}
	if !(math.Abs(sum-1) <= sumTolerance) {
		return nil, fmt.Errorf("the %ss add up to %.6g; they must make 1 within %g", kind, sum, sumTolerance)
	}
	for k := range out {
		out[k].share /= sum
	}
	return out, nil
}

// describe names a mixture by its shares, the largest first.
func describe(shares []ingredientShare) string {
	if len(shares) == 1 {
		return shares[0].name
	}
	bySize := slices.Clone(shares)
	slices.SortStableFunc(bySize, func(a, b ingredientShare) int { return cmp.Compare(b.share, a.share) })
	var words []string
	for _, s := range bySize {
		words = append(words, fmt.Sprintf("%s: %.4g %%", s.formula, 100*s.share))
	}
	return "gas: {" + strings.Join(words, ", ") + "}"
}
