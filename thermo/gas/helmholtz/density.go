package helmholtz

import "math"

// Limits of the search for a density. After a step of near, about near² is left,
// which the sums of the properties show and take away.
const (
	near     = 5e-5
	converge = 1e-10
	rounds   = 80
	densest  = 5.0 // δ above every state in range
)

// bracket is where the density of a phase is sought: between lo and hi, from
// start on.
type bracket struct {
	lo, hi, start float64
	side          side
}

// side tells how to read a point where the pressure falls with density. It is no
// state: below the critical temperature it lies above a gas and below a liquid.
// Above, only an equation's small waves near its critical point are left, and the
// pressure alone decides.
type side uint8

const (
	thinner side = iota
	denser
	single
)

// tooThin tells whether the density sought lies above one where the pressure is
// off by f and has that slope.
func (s side) tooThin(f, slope float64) bool {
	if slope > 0 || s == single {
		return f <= 0
	}
	return s == denser
}

// density solves δ(1 + δφ_δ) = q within a bracket by Newton's method, halving the
// bracket where a step would leave it. ok is false where the phase has no such
// state.
func (e *equation) density(iso *isotherm, q float64, b bracket) (delta float64, ok bool) {
	delta = min(max(b.start, b.lo), b.hi)
	for range rounds {
		s := e.slopes(iso, delta)
		f, slope := delta*(1+s.d)-q, 1+2*s.d+s.dd
		if b.side.tooThin(f, slope) {
			b.lo = delta
		} else {
			b.hi = delta
		}
		next := delta - f/slope
		if slope > 0 && math.Abs(next-delta) <= near*delta {
			return next, true
		}
		if !(slope > 0 && next > b.lo && next < b.hi) {
			next = (b.lo + b.hi) / 2
		}
		delta = next
	}
	return delta, false
}

// thin returns the δ of a gas for q = p/(ρr R T) by the second and third virial
// coefficients, to start the search from.
func (e *equation) thin(iso *isotherm, q float64) float64 {
	b, c := e.virial(iso)
	delta := q
	for range 3 {
		slope := 1 + delta*(2*b+3*c*delta)
		if slope < 0.3 {
			break
		}
		delta -= (delta*(1+delta*(b+c*delta)) - q) / slope
	}
	return max(delta, q/4)
}

// virial returns the coefficients of δ and δ² in δφ_δ at low density.
func (e *equation) virial(iso *isotherm) (b, c float64) {
	for i := range e.groups {
		g := &e.groups[i]
		var first, second float64
		if g.d == 1 {
			first = iso.cells[g.first].c
		}
		if k := 2 - g.d; k >= 0 && k < g.count {
			second = iso.cells[g.first+k].c
		}
		if g.l == 1 {
			second -= first
		}
		b += first
		c += 2 * second
	}
	for i := range e.bells {
		s := &e.bells[i]
		if f := iso.bells[i].c; f != 0 && s.d <= 2 && s.d > 0 {
			f *= math.Exp(-s.eta * s.epsilon * s.epsilon)
			if s.d == 1 {
				b += f
				c += 4 * s.eta * s.epsilon * f
			} else {
				c += 2 * f
			}
		}
	}
	return b, c
}
