package helmholtz

import "math"

// sums are the derivatives of a non-analytic term. Powers of (δ−1)² keep an
// exponent above zero, so that δ = 1 is no trap; only Δ = 0, which is the
// critical point itself, has no value.
func (c *nonAnalytic) sums(delta, tau float64) sums {
	x, y := delta-1, tau-1
	if c.C*x*x+c.D*y*y > vanishes {
		return sums{}
	}
	f := c.n * delta * math.Exp(-c.C*x*x-c.D*y*y)
	k := 1 / (2 * c.beta)
	lx := math.Log(x * x)
	xk, xa := math.Exp((k-1)*lx), math.Exp((c.a-1)*lx) // ((δ−1)²)^(k−1), ^(a−1)
	theta := -y + c.A*xk*x*x
	distance := theta*theta + c.B*xa*x*x

	// Δ and its derivatives
	inner := 4*k*c.A*theta*xk + 2*c.B*c.a*xa
	d := x * inner
	dd := inner + 4*c.B*c.a*(c.a-1)*xa + 8*k*k*c.A*c.A*x*x*xk*xk + 8*k*(k-1)*c.A*theta*xk

	// Δ^b and its derivatives, each over Δ^b
	i := 1 / distance
	bd := c.b * i * d
	bdd := c.b * i * (dd + (c.b-1)*i*d*d)
	bt := -2 * theta * c.b * i
	btt := c.b * i * (2 + 4*theta*theta*(c.b-1)*i)
	bdt := -c.b * i * (4*k*c.A*x*xk + 2*theta*(c.b-1)*i*d)

	// the exponential and its derivatives, each over itself
	pd, pt := -2*c.C*x, -2*c.D*y
	pdd, ptt, pdt := pd*pd-2*c.C, pt*pt-2*c.D, pd*pt

	f *= math.Exp(c.b * math.Log(distance))
	return sums{
		d:  f * (1 + delta*(bd+pd)),
		dd: f * delta * (2*(bd+pd) + delta*(bdd+2*bd*pd+pdd)),
		t:  f * tau * (bt + pt),
		tt: f * tau * tau * (btt + 2*bt*pt + ptt),
		dt: f * tau * (bt + pt + delta*(bdt+bd*pt+bt*pd+pdt)),
	}
}
