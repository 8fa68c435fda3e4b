package water

import (
	"math"
	"slices"

	"heatreeve/thermo"
)

// builder makes the columns of a table from one region's equation.
type builder[C any] struct {
	balance func(T, p float64) thermo.Balance
	gas     bool                                  // cells hold the density over the pressure
	maxT    float64                               // K, end of the region
	limits  func(T1, T2 float64) (lo, hi float64) // Pa, of the region between two temperatures
	fit     func(*C, *samples)
	at      func(c *C, x, y float64) (h, cp, density float64)

	worked int             // states so far
	room   [mostInColumn]C // for the column at work
}

// clear is the part by which columns keep away from the bounds of a region and of
// its fluid: more than any rounding.
const clear = 1e-9

var liquidBuilder = builder[liquidCell]{
	balance: region1, maxT: region1MaxT,
	limits: func(_, T2 float64) (lo, hi float64) { return saturationPressure(T2), highestP },
	fit:    (*liquidCell).fit, at: (*liquidCell).at,
}

var steamBuilder = builder[steamCell]{
	balance: region2, gas: true, maxT: region2MaxT,
	limits: func(T1, _ float64) (lo, hi float64) {
		switch {
		case T1 <= region1MaxT:
			return 0, saturationPressure(T1)
		case T1 < boundary23Top:
			return 0, boundary23Pressure(T1)
		}
		return 0, highestP
	},
	fit: (*steamCell).fit, at: (*steamCell).at,
}

// columns returns nil when all would be without cells.
func (b *builder[C]) columns(T1, T2, p1, p2 float64) []column[C] {
	out := make([]column[C], 0, int(T2-T1)+1)
	total, n := 0, 1
	for T := T1; T < T2 && T+1 < b.maxT*(1-clear); T = T1 + float64(len(out)) {
		lo, hi := b.limits(T, T+1)
		var c column[C]
		c, n = b.column(T+0.5, max(lo*(1+clear), p1), min(hi*(1-clear), p2), n)
		total += len(c.cells)
		out = append(out, c)
	}
	if total == 0 {
		return nil
	}
	return out
}

const (
	mostInColumn = 40     // cells
	mostWorked   = 44_000 // states in building a table, 2000 cells at most
)

// column has as few cells as are good enough; the search begins a little below
// the number of the column before, and steps by an eighth. It returns the number
// at which the search ended.
func (b *builder[C]) column(T, lo, hi float64, before int) (column[C], int) {
	if !(lo < hi) {
		return column[C]{}, before
	}
	n := max(before-max(before/8, 1), 1)
	for ; n <= mostInColumn; n += max(n/8, 1) {
		if b.fill(b.room[:n], T, lo, (hi-lo)/float64(n)) {
			perPascal := float64(n) / (hi - lo)
			return column[C]{lo + 0.5/perPascal, perPascal, slices.Clone(b.room[:n])}, n
		}
	}
	return column[C]{}, min(n, mostInColumn)
}

// fill is false when a cell is not good enough, or would be one too many to work.
// It begins where that is most likely: next to saturation.
func (b *builder[C]) fill(cells []C, T, lo, height float64) bool {
	for k := range cells {
		if b.worked+statesOfCell > mostWorked {
			return false
		}
		if b.gas {
			k = len(cells) - 1 - k
		}
		p := lo + (float64(k)+0.5)*height
		s := b.sample(T, p, height)
		var c C
		b.fit(&c, &s)
		if !b.good(&c, &s, T, p, height) {
			return false
		}
		cells[k] = c
	}
	return true
}

// sample works the factors of the powers of x = T' − T at each node of pressure:
// h with its own values and its cp at both ends of the kelvin, so that both go on
// smoothly in the next column, density with its values at both ends and at T.
func (b *builder[C]) sample(T, p, height float64) (s samples) {
	for k, y := range nodes {
		at := p + y*height
		l, m, r := b.state(T-0.5, at), b.state(T, at), b.state(T+0.5, at)
		s.states[k] = [3]thermo.Balance{l, m, r}
		rise := r.Enthalpy - l.Enthalpy
		s.h[0][k] = (l.Enthalpy+r.Enthalpy)/2 + (l.Cp-r.Cp)/8
		s.h[1][k] = 1.5*rise - (l.Cp+r.Cp)/4
		s.h[2][k] = (r.Cp - l.Cp) / 2
		s.h[3][k] = l.Cp + r.Cp - 2*rise
		unit := 1.0
		if b.gas {
			unit = 1 / at
		}
		s.d[0][k] = m.Density * unit
		s.d[1][k] = (r.Density - l.Density) * unit
		s.d[2][k] = 2 * (l.Density + r.Density - 2*m.Density) * unit
	}
	return s
}

func (b *builder[C]) state(T, p float64) thermo.Balance {
	b.worked++
	return b.balance(T, p)
}

// What a cell may be off by where it is looked at, so much less than what is
// promised that it keeps the promise in between.
const (
	tabulated    = 1.6e-7 // of h and density
	tabulatedOne = 1.2e-6 // of the enthalpy of 1 K; a difference has two such errors
)

// probes are further states of a cell, by x and y: at the edges of pressure, and
// where the temperature is between the interpolated ones.
var probes = [...][2]float64{{-0.5, -0.49}, {0.5, 0.49}, {-0.5, 0.49}, {0.5, -0.49}, {0.3, -0.49}, {-0.3, 0.49}, {0.3, 0.15}}

// statesOfCell is how often the equation is worked for a cell.
const statesOfCell = 3*len(nodes) + len(probes)

// good compares a cell with the equation at its samples, where what the series
// leave out is near its largest, and at the probes.
func (b *builder[C]) good(c *C, s *samples, T, p, height float64) bool {
	for k, y := range nodes {
		for i, x := range [...]float64{-0.5, 0, 0.5} {
			if !b.near(c, x, y, p+y*height, &s.states[k][i]) {
				return false
			}
		}
	}
	for _, at := range probes {
		x, y := at[0], at[1]
		want := b.state(T+x, p+y*height)
		if !b.near(c, x, y, p+y*height, &want) {
			return false
		}
	}
	return true
}

func (b *builder[C]) near(c *C, x, y, p float64, want *thermo.Balance) bool {
	h, _, density := b.at(c, x, y)
	if b.gas {
		density *= p
	}
	off := math.Abs(h - want.Enthalpy)
	return off <= tabulatedOne*want.Cp && off <= tabulated*max(math.Abs(want.Enthalpy), 1e3) &&
		math.Abs(density-want.Density) <= tabulated*want.Density
}

// nodes are the zeros of the Chebyshev polynomial of degree 5, halved: pressures
// from the middle of a cell in its heights. series[n][k] is the share that the
// value at node k has in the factor of the polynomial n of a series.
var nodes, series = func() (x [5]float64, s [5][5]float64) {
	for k := range x {
		angle := math.Pi * (float64(k) + 0.5) / 5
		x[k] = math.Cos(angle) / 2
		for n := range s {
			s[n][k] = 2.0 / 5 * math.Cos(float64(n)*angle)
		}
		s[0][k] = 1.0 / 5
	}
	return x, s
}()
