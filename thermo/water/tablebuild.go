package water

import (
	"math"

	"heatreeve/thermo"
)

// equation is what a table is built from.
type equation struct {
	balance func(T, p float64) thermo.Balance
	maxT    float64 // K, where its region ends
	gas     bool
	// limits of the region between two temperatures in K, in Pa.
	limits func(T1, T2 float64) (lo, hi float64)
}

var liquidEquation = equation{region1, region1MaxT, false, func(_, T2 float64) (lo, hi float64) {
	return saturationPressure(T2), highestP
}}

var steamEquation = equation{region2, region2MaxT, true, func(T1, _ float64) (lo, hi float64) {
	switch {
	case T1 <= region1MaxT:
		return 0, saturationPressure(T1)
	case T1 < boundary23Top:
		return 0, boundary23Pressure(T1)
	}
	return 0, highestP
}}

const (
	mostCells     = 1500 // of a table: 384 KB
	mostInColumn  = 32
	tabulated     = 1e-7    // relative, of h and density: half of what is promised
	tabulatedDrop = 0.75e-6 // relative, of the enthalpy of 1 K: a quarter of what is promised for a difference
)

func (e *equation) table(f thermo.Fluid, T1, T2, p1, p2 float64) *table {
	t := &table{Fluid: f, exact: thermo.BalanceOf(f), T1: T1, gas: e.gas}
	t.columns = make([]column, 0, int(T2-T1)+1)
	n := 1
	for T := T1; T < T2; T = T1 + float64(len(t.columns)) {
		lo, hi := e.limits(T, T+1)
		c := column{lo: max(p1, lo), hi: min(p2, hi), first: int32(len(t.cells))}
		if T+1 > e.maxT || !(c.lo < c.hi) {
			n = 0
		} else {
			n = e.fill(t, &c, T+0.5, n)
		}
		if n == 0 {
			c.lo, c.hi, n = math.Inf(1), math.Inf(-1), 1
		}
		t.columns = append(t.columns, c)
	}
	return t
}

// fill adds the fewest cells to the table that are good enough, beginning one
// below the number of the column before, and returns how many they are.
func (e *equation) fill(t *table, c *column, T float64, before int) int {
	for n := max(before-1, 1); n <= mostInColumn && int(c.first)+n <= mostCells; n++ {
		c.perPascal, c.last = float64(n)/(c.hi-c.lo), int32(n-1)
		if e.fillWith(t, c, T, n) {
			return n
		}
		t.cells = t.cells[:c.first]
	}
	return 0
}

// fillWith begins with the cell next to saturation, the hardest one.
func (e *equation) fillWith(t *table, c *column, T float64, n int) bool {
	height := (c.hi - c.lo) / float64(n)
	hardest := 0
	if e.gas {
		hardest = n - 1
	}
	if first := e.cell(T, c.lo+(float64(hardest)+0.5)*height, height); !e.good(&first, T, c.lo+(float64(hardest)+0.5)*height, height) {
		return false
	}
	for k := range n {
		p := c.lo + (float64(k)+0.5)*height
		x := e.cell(T, p, height)
		if !e.good(&x, T, p, height) {
			return false
		}
		t.cells = append(t.cells, x)
	}
	return true
}

// cell interpolates around T and p: h by its values and its cp at both ends of
// the kelvin, density by both ends and the middle, each along five pressures.
func (e *equation) cell(T, p, height float64) (c cell) {
	var h [4][5]float64
	var d [3][5]float64
	for k, q := range nodes {
		at := p + q*height
		a, m, b := e.balance(T-0.5, at), e.balance(T, at), e.balance(T+0.5, at)
		rise := b.Enthalpy - a.Enthalpy
		h[0][k] = (a.Enthalpy+b.Enthalpy)/2 + (a.Cp-b.Cp)/8
		h[1][k] = 1.5*rise - (a.Cp+b.Cp)/4
		h[2][k] = (b.Cp - a.Cp) / 2
		h[3][k] = a.Cp + b.Cp - 2*rise
		if e.gas {
			a.Density, m.Density, b.Density = a.Density/at, m.Density/at, b.Density/at
		}
		d[0][k] = m.Density
		d[1][k] = b.Density - a.Density
		d[2][k] = 2 * (a.Density + b.Density - 2*m.Density)
	}
	for i := range h {
		c.h[i] = along(&h[i], 5)
	}
	for i := range d {
		f := along(&d[i], 4)
		c.d[i] = [4]float64(f[:4])
	}
	return c
}

// nodes are the pressures of a cell, from its middle in heights: the zeros of the
// Chebyshev polynomial of degree 5, halved.
var nodes = func() (x [5]float64) {
	for k := range x {
		x[k] = -math.Cos(math.Pi*(float64(k)+0.5)/5) / 2
	}
	return x
}()

// chebyshev holds the factors of the Chebyshev polynomials T₀ to T₄ of 2q, by
// the power of q.
var chebyshev = [5][5]float64{{1}, {0, 2}, {-1, 0, 8}, {0, -6, 0, 32}, {1, 0, -32, 0, 128}}

// along returns the factors of q^k of the polynomial through the values at the
// nodes, cut down to the first terms of its Chebyshev series.
func along(values *[5]float64, terms int) (f [5]float64) {
	for n := range terms {
		var c float64
		for k, q := range nodes {
			c += values[k] * polynomial(&chebyshev[n], q)
		}
		c *= 2.0 / 5
		if n == 0 {
			c /= 2
		}
		for k := range f {
			f[k] += c * chebyshev[n][k]
		}
	}
	return f
}

func polynomial(f *[5]float64, q float64) float64 {
	return f[0] + q*(f[1]+q*(f[2]+q*(f[3]+q*f[4])))
}

// good compares a cell with the equation where it is worst: at the edge and in
// the middle of its pressures, in the middle of its kelvin and between that and
// its edge.
func (e *equation) good(c *cell, T, p, height float64) bool {
	for _, q := range [...]float64{-0.499, -0.15, 0.499} {
		for _, t := range [...]float64{0, 0.3} {
			at := p + q*height
			want, got := e.balance(T+t, at), c.at(t, q)
			if e.gas {
				got.Density *= at
			}
			d := math.Abs(got.Enthalpy - want.Enthalpy)
			if !(d <= tabulatedDrop*want.Cp && d <= tabulated*max(math.Abs(want.Enthalpy), 1e3) && math.Abs(got.Density/want.Density-1) <= tabulated) {
				return false
			}
		}
	}
	return true
}
