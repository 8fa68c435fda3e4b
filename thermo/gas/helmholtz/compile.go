package helmholtz

import (
	"cmp"
	"math"
	"slices"
)

// compile orders the residual part of s. It panics where the table needs more
// room than an isotherm has, which is a fault of the program.
func compile(s *substance) *equation {
	e := &equation{parts: []float64{0}, nonAnalytics: s.nonAnalytics, degree: 1}
	terms := slices.Clone(s.powers)
	slices.SortStableFunc(terms, func(a, b power) int { return cmp.Or(cmp.Compare(a.l, b.l), cmp.Compare(a.d, b.d)) })
	for _, t := range terms {
		e.addPower(t)
	}
	for _, g := range s.gaussians {
		e.addGaussian(g)
	}
	if e.cells() > maxCells || len(e.bells) > maxBells || len(e.parts) > maxParts || e.highest-e.lowest >= maxWhole || e.degree >= maxDegree {
		panic("helmholtz: the equation of " + s.name + " is larger than an isotherm has room for")
	}
	return e
}

func (e *equation) cells() int {
	if len(e.groups) == 0 {
		return 0
	}
	last := e.groups[len(e.groups)-1]
	return last.first + last.count
}

// addPower takes terms by rising l, and by rising d within one l.
func (e *equation) addPower(t power) {
	n := len(e.groups)
	if n == 0 || e.groups[n-1].l != t.l {
		e.groups = append(e.groups, group{l: t.l, d: t.d, first: e.cells()})
		n++
	}
	g := &e.groups[n-1]
	g.count = t.d - g.d + 1
	e.degree = max(e.degree, t.d, t.l)
	whole := int(math.Floor(t.t))
	e.lowest, e.highest = min(e.lowest, whole), max(e.highest, whole)
	part := slices.Index(e.parts, t.t-float64(whole))
	if part < 0 {
		part = len(e.parts)
		e.parts = append(e.parts, t.t-float64(whole))
	}
	e.powers = append(e.powers, tauPower{n: t.n, t: t.t, whole: uint8(whole + 8), part: uint8(part), cell: uint8(g.first + t.d - g.d)})
}

func (e *equation) addGaussian(g gaussian) {
	b := bell{g.d, g.eta, g.epsilon}
	k := slices.Index(e.bells, b)
	if k < 0 {
		k = len(e.bells)
		e.bells = append(e.bells, b)
	}
	e.degree = max(e.degree, g.d)
	e.shapes = append(e.shapes, tauShape{g.n, g.t, g.beta, g.gamma, g.b, k})
}
