package helmholtz

import "math"

// curve is an auxiliary equation of the saturation line in θ = 1 − T/curve.T. It
// comes beside an equation of state to start its solution.
type curve struct {
	form     curveForm
	scale, T float64
	terms    []curveTerm
}

type curveTerm struct{ n, t float64 }

type curveForm uint8

const (
	expOverT  curveForm = iota + 1 // scale·exp((curve.T/T) Σ n θ^t)
	expForm                        // scale·exp(Σ n θ^t)
	plainForm                      // scale·(1 + Σ n θ^t)
)

// sum returns Σ n θ^t and its derivative by ln θ.
func (c *curve) sum(T float64) (s, slope float64) {
	lt := math.Log(max(1-T/c.T, 0))
	for _, term := range c.terms {
		x := term.n * math.Exp(term.t*lt)
		s += x
		slope += term.t * x
	}
	return s, slope
}

// at returns the curve's value at T in K, that of its end where T lies beyond.
func (c *curve) at(T float64) float64 {
	s, _ := c.sum(T)
	switch c.form {
	case expOverT:
		return c.scale * math.Exp(c.T/T*s)
	case expForm:
		return c.scale * math.Exp(s)
	}
	return c.scale * (1 + s)
}

// temperature returns the T in K between lo and hi at which a pressure curve of
// the form expOverT reaches p: Newton's method in ln p against 1/T, which is
// nearly a straight line, kept within a bracket.
func (c *curve) temperature(p, lo, hi float64) float64 {
	want := math.Log(p / c.scale)
	T := hi
	for range 60 {
		s, slope := c.sum(T)
		f := c.T/T*s - want
		if f > 0 {
			hi = T
		} else {
			lo = T
		}
		// d(ln p)/d(1/T)
		d := c.T*s + slope*T/(1-T/c.T)
		next := 1 / (1/T - f/d)
		if !(next > lo && next < hi) {
			if math.Abs(next-T) <= 1e-14*T {
				return T
			}
			next = (lo + hi) / 2
		}
		if math.Abs(next-T) <= 1e-14*T {
			return next
		}
		T = next
	}
	return T
}
