package water

import "heatreeve/thermo"

// gasConstant is the specific gas constant that R7-97(2012), equation 1, goes
// with, in J/(kg K). It is not thermo.R over the molar mass to all its digits.
const gasConstant = 461.526

// gibbs holds the dimensionless Gibbs energy γ = g/(RT) and its derivatives,
// each multiplied by the powers of π and τ that make it finite as p goes to 0.
type gibbs struct {
	g  float64 // γ
	p  float64 // π ∂γ/∂π
	t  float64 // τ ∂γ/∂τ
	pp float64 // π² ∂²γ/∂π²
	tt float64 // τ² ∂²γ/∂τ²
	pt float64 // πτ ∂²γ/∂π∂τ
}

func (g gibbs) plus(o gibbs) gibbs {
	return gibbs{g.g + o.g, g.p + o.p, g.t + o.t, g.pp + o.pp, g.tt + o.tt, g.pt + o.pt}
}

// properties follow from γ by the relations of R7-97(2012), tables 3 and 12.
func (g gibbs) properties(T, p float64) thermo.Properties {
	rt := gasConstant * T
	pv := rt * g.p
	h := rt * g.t
	d := g.p - g.pt
	return thermo.Properties{
		Enthalpy:       h,
		InternalEnergy: h - pv,
		Cp:             -gasConstant * g.tt,
		Cv:             gasConstant * (d*d/g.pp - g.tt),
		Density:        p / pv,
	}
}

// term is one line n x^I y^J of a table of the release.
type term struct {
	n    float64
	i, j int8
}

// group is the terms of one I, prepared for summing.
type group struct {
	i      float64
	x      uint8 // where x^I stands among the powers
	powers []power
}

// power is n y^J, with its place among the powers of y.
type power struct {
	n, nj, njj float64 // n, nJ, nJ²
	y          uint8
}

// grouped prepares a table whose lines stand in the order of I. The powers of y
// begin with y^lowest.
func grouped(terms []term, lowest int8) []group {
	var out []group
	for k, t := range terms {
		if k == 0 || t.i != terms[k-1].i {
			out = append(out, group{i: float64(t.i), x: uint8(t.i)})
		}
		g, j := &out[len(out)-1], float64(t.j)
		g.powers = append(g.powers, power{t.n, t.n * j, t.n * j * j, uint8(t.j - lowest)})
	}
	return out
}

// powers of one quantity; which exponent stands where is the filler's affair.
type powers [64]float64

// sum gathers the terms of all groups and their derivatives, where
// fx = (π/x)(dx/dπ) and fy = (τ/y)(dy/dτ).
func sum(groups []group, x, y *powers, fx, fy float64) gibbs {
	var one, si, sj, sii, sjj, sij float64
	for k := range groups {
		g := &groups[k]
		var a, b, c float64
		for m := range g.powers {
			q := &g.powers[m]
			v := y[q.y&63]
			a += q.n * v
			b += q.nj * v
			c += q.njj * v
		}
		v := x[g.x&63]
		a, b, c = a*v, b*v, c*v
		ia := g.i * a
		one += a
		si += ia
		sj += b
		sii += g.i * ia
		sjj += c
		sij += g.i * b
	}
	return gibbs{
		g:  one,
		p:  fx * si,
		t:  fy * sj,
		pp: fx * fx * (sii - si),
		tt: fy * fy * (sjj - sj),
		pt: fx * fy * sij,
	}
}
