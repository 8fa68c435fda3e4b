package water

import "heatreeve/thermo"

// liquidCell holds the factors of a polynomial for h in J/kg and one for density
// in kg/m³, of degree 3 and 2 in temperature: h1[k] goes with x y^k, where x is in K
// and y in heights of the cell, both from its middle. The higher the power of x,
// the fewer of y are worth their time.
type liquidCell struct {
	h0, h1 [4]float64
	h2     [3]float64
	h3     [2]float64
	d0     [3]float64
	d1     [2]float64
	d2     [1]float64
}

// at returns the polynomials and the derivative of that for h.
func (c *liquidCell) at(x, y float64) (h, cp, density float64) {
	y2 := y * y
	h1 := (c.h1[0] + y*c.h1[1]) + y2*(c.h1[2]+y*c.h1[3])
	h2 := c.h2[0] + y*c.h2[1] + y2*c.h2[2]
	u := x * (c.h3[0] + y*c.h3[1])
	v := x * (h2 + u)
	mean := h1 + v // cp between the middle and x
	h = (c.h0[0] + y*c.h0[1]) + y2*(c.h0[2]+y*c.h0[3]) + x*mean
	density = c.d0[0] + y*c.d0[1] + y2*c.d0[2] + x*(c.d1[0]+y*c.d1[1]+x*c.d2[0])
	return h, mean + (v + x*u), density
}

// steamCell is liquidCell with more powers of pressure, and with the density over
// the pressure in kg/(m³ Pa), which changes less than the density. What both sums
// have in common is written out: as functions it took steam 2 % more time.
type steamCell struct {
	h0 [5]float64
	h1 [4]float64
	h2 [3]float64
	h3 [2]float64
	d0 [4]float64
	d1 [3]float64
	d2 [2]float64
}

func (c *steamCell) at(x, y float64) (h, cp, density float64) {
	y2 := y * y
	h0 := (c.h0[0] + y*c.h0[1]) + y2*((c.h0[2]+y*c.h0[3])+y2*c.h0[4])
	h1 := (c.h1[0] + y*c.h1[1]) + y2*(c.h1[2]+y*c.h1[3])
	h2 := c.h2[0] + y*c.h2[1] + y2*c.h2[2]
	u := x * (c.h3[0] + y*c.h3[1])
	v := x * (h2 + u)
	mean := h1 + v
	d0 := (c.d0[0] + y*c.d0[1]) + y2*(c.d0[2]+y*c.d0[3])
	d1 := c.d1[0] + y*c.d1[1] + y2*c.d1[2]
	return h0 + x*mean, mean + (v + x*u), d0 + x*(d1+x*(c.d2[0]+y*c.d2[1]))
}

// samples are the factors of x^i at each node of pressure, and the states that they
// are made of.
type samples struct {
	states [5][3]thermo.Balance
	h      [4][5]float64
	d      [3][5]float64
}

func (c *liquidCell) fit(s *samples) {
	along(c.h0[:], &s.h[0])
	along(c.h1[:], &s.h[1])
	along(c.h2[:], &s.h[2])
	along(c.h3[:], &s.h[3])
	along(c.d0[:], &s.d[0])
	along(c.d1[:], &s.d[1])
	along(c.d2[:], &s.d[2])
}

func (c *steamCell) fit(s *samples) {
	along(c.h0[:], &s.h[0])
	along(c.h1[:], &s.h[1])
	along(c.h2[:], &s.h[2])
	along(c.h3[:], &s.h[3])
	along(c.d0[:], &s.d[0])
	along(c.d1[:], &s.d[1])
	along(c.d2[:], &s.d[2])
}

// along sets f to the factors of y^k of the polynomial through the values at the
// nodes, cut down to so many terms of its Chebyshev series.
func along(f []float64, values *[5]float64) {
	for n := range f {
		var c float64
		for k := range values {
			c += series[n][k] * values[k]
		}
		for k := range f {
			f[k] += c * chebyshev[n][k]
		}
	}
}

// chebyshev holds the Chebyshev polynomials T₀ to T₄ of 2y, by the power of y.
var chebyshev = [5][5]float64{{1}, {0, 2}, {-1, 0, 8}, {0, -6, 0, 32}, {1, 0, -32, 0, 128}}
