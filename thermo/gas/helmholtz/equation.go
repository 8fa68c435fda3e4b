package helmholtz

import "math"

// Sizes of what is worked out for one temperature. They hold all substances;
// compile panics where one does not fit.
const (
	maxCells  = 48 // products δ^d exp(−δ^l)
	maxBells  = 14 // products δ^d exp(−η(δ−ε)²)
	maxWhole  = 32 // whole powers of τ
	maxParts  = 24 // broken powers of τ
	maxDegree = 16 // powers of δ
)

// equation is the residual part φ of a substance, ordered so that one temperature
// costs its powers of τ once, and one density after that a polynomial in δ for
// each exp(−δ^l).
type equation struct {
	powers       []tauPower
	groups       []group
	shapes       []tauShape
	bells        []bell
	nonAnalytics []nonAnalytic
	parts        []float64 // broken parts of the powers of τ; the first is 0
	lowest       int       // whole powers of τ run from here
	highest      int       // to here
	degree       int       // highest power of δ
}

// tauPower is n τ^t, a part of the coefficient of a cell.
type tauPower struct {
	n, t              float64
	whole, part, cell uint8
}

// group is exp(−δ^l) times a polynomial in δ with count coefficients from δ^d on.
type group struct{ l, d, first, count int }

// tauShape is the temperature part of a gaussian.
type tauShape struct {
	n, t, beta, gamma, b float64
	bell                 int
}

// bell is δ^d exp(−η(δ−ε)²).
type bell struct {
	d            int
	eta, epsilon float64
}

// cell is the coefficient of one power of δ at one temperature: c(τ), τ c′(τ) and
// τ² c″(τ).
type cell struct{ c, t, tt float64 }

// isotherm is an equation at one temperature.
type isotherm struct {
	tau   float64
	cells [maxCells]cell
	bells [maxBells]cell
}

// vanishes is an exponent below which a Gaussian is no part of any figure:
// exp(−60) = 9e-27, while no coefficient is above 1e5.
const vanishes = 60

// at works e out for τ.
func (e *equation) at(tau float64, iso *isotherm) {
	iso.tau = tau
	lt := math.Log(tau)
	var whole [maxWhole + 8]float64 // whole[k] = τ^(k−8)
	whole[8] = 1
	for k := 9; k <= e.highest+8; k++ {
		whole[k] = whole[k-1] * tau
	}
	for k := 7; k >= e.lowest+8; k-- {
		whole[k] = whole[k+1] / tau
	}
	var part [maxParts]float64
	for k, t := range e.parts {
		part[k] = math.Exp(t * lt)
	}
	for i := range e.powers {
		p := &e.powers[i]
		x := p.n * whole[p.whole] * part[p.part]
		y := p.t * x
		c := &iso.cells[p.cell]
		c.c += x
		c.t += y
		c.tt += (p.t - 1) * y
	}
	for i := range e.shapes {
		s := &e.shapes[i]
		if s.b == 0 && s.beta*(tau-s.gamma)*(tau-s.gamma) > vanishes {
			continue
		}
		s.add(tau, lt, &iso.bells[s.bell])
	}
}

// add adds f = n τ^t exp(g(τ)), τf′ and τ²f″ to c. With w = τf′/f these are f, wf
// and (w² − w + τw′)f.
func (s *tauShape) add(tau, lt float64, c *cell) {
	x := tau - s.gamma
	g, w, dw := -s.beta*x*x, s.t-2*s.beta*tau*x, -2*s.beta*tau*(tau+x)
	if s.b != 0 {
		q := 1 / (s.b - g)
		g, w, dw = q, s.t-2*s.beta*tau*x*q*q, (8*s.beta*s.beta*tau*tau*x*x*q-2*s.beta*tau*(tau+x))*q*q
	}
	f := s.n * math.Exp(s.t*lt+g)
	c.c += f
	c.t += w * f
	c.tt += (w*w - w + dw) * f
}

// slopes are δφ_δ and δ²φ_δδ.
type slopes struct{ d, dd float64 }

// sums are the derivatives of φ that the properties need: δφ_δ, δ²φ_δδ, τφ_τ,
// τ²φ_ττ and δτφ_δτ.
type sums struct{ d, dd, t, tt, dt float64 }

type powersOf [maxDegree]float64

func (e *equation) deltaPowers(delta float64, pw *powersOf) {
	pw[0] = 1
	for k := 1; k <= e.degree; k++ {
		pw[k] = pw[k-1] * delta
	}
}

// slopes is the part of sums that finding a density needs.
func (e *equation) slopes(iso *isotherm, delta float64) slopes {
	var pw powersOf
	e.deltaPowers(delta, &pw)
	var out slopes
	for i := range e.groups {
		g := &e.groups[i]
		var s0, s1, s2 float64
		f := float64(g.d)
		for k := range g.count {
			x := iso.cells[g.first+k].c * pw[g.d+k]
			y := f * x
			s0 += x
			s1 += y
			s2 += f * y
			f++
		}
		if g.l == 0 {
			out.d += s1
			out.dd += s2 - s1
			continue
		}
		exp, l := math.Exp(-pw[g.l]), float64(g.l)
		lx := l * pw[g.l]
		out.d += exp * (s1 - lx*s0)
		out.dd += exp * (s2 - s1 + lx*((lx-l+1)*s0-2*s1))
	}
	for i := range e.bells {
		if c := &iso.bells[i]; c.c != 0 {
			b := &e.bells[i]
			x := delta - b.epsilon
			f := c.c * pw[b.d] * math.Exp(-b.eta*x*x)
			w := float64(b.d) - 2*b.eta*delta*x
			out.d += w * f
			out.dd += (w*w - float64(b.d) - 2*b.eta*delta*delta) * f
		}
	}
	s := criticalSums(e.nonAnalytics, delta, iso.tau)
	out.d += s.d
	out.dd += s.dd
	return out
}

func (e *equation) sums(iso *isotherm, delta float64) sums {
	var pw powersOf
	e.deltaPowers(delta, &pw)
	var out sums
	for i := range e.groups {
		e.groups[i].add(iso, &pw, &out)
	}
	for i := range e.bells {
		if c := &iso.bells[i]; c.c != 0 || c.t != 0 {
			e.bells[i].add(c, delta, pw[e.bells[i].d], &out)
		}
	}
	out.plus(criticalSums(e.nonAnalytics, delta, iso.tau))
	return out
}

func (s *sums) plus(o sums) {
	s.d += o.d
	s.dd += o.dd
	s.t += o.t
	s.tt += o.tt
	s.dt += o.dt
}

func (g *group) add(iso *isotherm, pw *powersOf, out *sums) {
	var s0, s1, s2, t0, t1, tt float64
	f := float64(g.d)
	for k := range g.count {
		c, v := &iso.cells[g.first+k], pw[g.d+k]
		x, t := c.c*v, c.t*v
		y := f * x
		s0 += x
		s1 += y
		s2 += f * y
		t0 += t
		t1 += f * t
		tt += c.tt * v
		f++
	}
	exp, lx, l := 1.0, 0.0, float64(g.l)
	if g.l > 0 {
		exp, lx = math.Exp(-pw[g.l]), l*pw[g.l]
	}
	out.plus(sums{
		d:  exp * (s1 - lx*s0),
		dd: exp * (s2 - s1 + lx*((lx-l+1)*s0-2*s1)),
		t:  exp * t0,
		tt: exp * tt,
		dt: exp * (t1 - lx*t0),
	})
}

func (b *bell) add(c *cell, delta, power float64, out *sums) {
	x := delta - b.epsilon
	f := power * math.Exp(-b.eta*x*x)
	w := float64(b.d) - 2*b.eta*delta*x
	out.plus(sums{
		d:  w * c.c * f,
		dd: (w*w - float64(b.d) - 2*b.eta*delta*delta) * c.c * f,
		t:  c.t * f,
		tt: c.tt * f,
		dt: w * c.t * f,
	})
}
