package helmholtz

import "math"

// criticalSums returns the derivatives of the non-analytic terms. Powers of
// (δ−1)² keep an exponent above zero, so that δ = 1 is no trap; only Δ = 0, which
// is the critical point itself, has no value.
func criticalSums(terms []nonAnalytic, delta, tau float64) sums {
	var out sums
	if len(terms) == 0 {
		return out
	}
	x, y := delta-1, tau-1
	lx := math.Log(x * x)
	var psi float64
	var d distance
	var damped, shaped *nonAnalytic // the terms that psi and d are of
	for i := range terms {
		c := &terms[i]
		if c.C*x*x+c.D*y*y > vanishes {
			continue
		}
		if damped == nil || c.C != damped.C || c.D != damped.D {
			damped, psi = c, math.Exp(-c.C*x*x-c.D*y*y)
		}
		if shaped == nil || c.a != shaped.a || c.A != shaped.A || c.B != shaped.B || c.beta != shaped.beta {
			shaped, d = c, c.distance(x, y, lx)
		}
		out.plus(c.sums(delta, tau, psi, &d))
	}
	return out
}

// distance is Δ with its derivatives by δ and τ.
type distance struct {
	value, log   float64
	d, dd, t, dt float64
}

// distance works Δ out at x = δ−1 and y = τ−1, with lx = ln x².
func (c *nonAnalytic) distance(x, y, lx float64) distance {
	k := 1 / (2 * c.beta)
	xk, xa := math.Exp((k-1)*lx), math.Exp((c.a-1)*lx) // ((δ−1)²)^(k−1), ^(a−1)
	theta := -y + c.A*xk*x*x
	value := theta*theta + c.B*xa*x*x
	inner := 4*k*c.A*theta*xk + 2*c.B*c.a*xa
	return distance{
		value: value,
		log:   math.Log(value),
		d:     x * inner,
		dd:    inner + 4*c.B*c.a*(c.a-1)*xa + 8*k*k*c.A*c.A*x*x*xk*xk + 8*k*(k-1)*c.A*theta*xk,
		t:     -2 * theta,
		dt:    -4 * k * c.A * x * xk,
	}
}

func (c *nonAnalytic) sums(delta, tau, psi float64, s *distance) sums {
	// Δ^b and its derivatives, each over Δ^b; Δ_ττ is 2
	i := 1 / s.value
	bd := c.b * i * s.d
	bt := c.b * i * s.t
	bdd := c.b * i * (s.dd + (c.b-1)*i*s.d*s.d)
	btt := c.b * i * (2 + (c.b-1)*i*s.t*s.t)
	bdt := c.b * i * (s.dt + (c.b-1)*i*s.d*s.t)

	// the exponential and its derivatives, each over itself
	pd, pt := -2*c.C*(delta-1), -2*c.D*(tau-1)
	pdd, ptt, pdt := pd*pd-2*c.C, pt*pt-2*c.D, pd*pt

	f := c.n * delta * psi * math.Exp(c.b*s.log)
	return sums{
		d:  f * (1 + delta*(bd+pd)),
		dd: f * delta * (2*(bd+pd) + delta*(bdd+2*bd*pd+pdd)),
		t:  f * tau * (bt + pt),
		tt: f * tau * tau * (btt + 2*bt*pt + ptt),
		dt: f * tau * (bt + pt + delta*(bdt+bd*pt+bt*pd+pdt)),
	}
}
