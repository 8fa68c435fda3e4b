package water

import "heatreeve/thermo"

// gasConstant is the specific gas constant that R7-97(2012), equation 1, goes
// with, in J/(kg K). It is not thermo.R over the molar mass to all its digits.
const gasConstant = 461.526

// term is one line n x^I y^J of a table of the release.
type term struct {
	n    float64
	i, j int8
}

// idealTerm is one line n τ^J of a table of an ideal-gas part.
type idealTerm struct {
	n float64
	j int8
}

// lines holds one factor for each line of a table, counted from 0.
type lines [43]float64

// weights are the factors that turn Σ n x^I y^J into its derivatives: with i,
// the sum is x ∂/∂x of it, with jj it is y² ∂²/∂y², and so on.
type weights struct {
	i, j       lines // nI, nJ
	ii, jj, ij lines // nI(I − 1), nJ(J − 1), nIJ
}

func weigh(terms []term) (w weights) {
	for k, t := range terms {
		i, j := float64(t.i), float64(t.j)
		w.i[k], w.j[k] = t.n*i, t.n*j
		w.ii[k], w.jj[k], w.ij[k] = t.n*i*(i-1), t.n*j*(j-1), t.n*i*j
	}
	return w
}

// complete adds to a balance what else belongs to the state.
func complete(b thermo.Balance, p, cv float64) thermo.Properties {
	return thermo.Properties{
		Enthalpy:       b.Enthalpy,
		InternalEnergy: b.Enthalpy - p/b.Density,
		Cp:             b.Cp,
		Cv:             cv,
		Density:        b.Density,
	}
}
