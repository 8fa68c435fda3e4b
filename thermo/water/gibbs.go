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

// sums gathers Σt, ΣIt, ΣJt, ΣI²t, ΣJ²t and ΣIJt over terms t = n x^I y^J.
type sums struct{ one, i, j, ii, jj, ij float64 }

func (s *sums) add(t, i, j float64) {
	ti, tj := t*i, t*j
	s.one += t
	s.i += ti
	s.j += tj
	s.ii += ti * i
	s.jj += tj * j
	s.ij += ti * j
}

// scaled turns the sums into derivatives, where fx = (π/x)(dx/dπ) and
// fy = (τ/y)(dy/dτ).
func (s *sums) scaled(fx, fy float64) gibbs {
	return gibbs{
		g:  s.one,
		p:  fx * s.i,
		t:  fy * s.j,
		pp: fx * fx * (s.ii - s.i),
		tt: fy * fy * (s.jj - s.j),
		pt: fx * fy * s.ij,
	}
}
