package water

import (
	"math"

	"heatreeve/thermo"
)

// Tabulate returns f, which has to be [Liquid] or [Steam], with a table of its
// enthalpy and density between T1 and T2 in K and the absolute pressures p1 and p2
// in Pa. Where the table answers, Balance takes a third (water) to a fifth (steam)
// of the time of the exact equations: a 225th and a 172nd (167th to 179th, run by
// run) of that of the equations as printed. Steam does not come to a 200th: the
// bound takes the 23 factors of its cells, and with two fewer those of process steam
// are too many to build. The table answers where region 1 or 2 is all around: in
// columns of 1 K, which end where saturation begins within the kelvin. Any other
// state is worked exactly. Name, range, limits and errors stay f's.
//
// In the table, h is within 2e-7 of the exact one (of 1 kJ/kg at least), density
// within 2e-7, a difference of h over 1 K or more within 3e-6, and cp is the
// derivative of the tabulated h, within 1e-5. At gives these three as well; u
// follows from them, and cv keeps its exact ratio to cp, so At takes no less time
// than f's.
//
// Building works 44 000 states at most, which takes some 2.2 ms (water) or 2.9 ms
// (steam); where more columns are asked for, those of the highest temperatures stay
// exact. It pays from some 10 000 (water, 200 K) or 70 000 (steam, 300 K) balances
// on. A table holds 152 B (water) or 184 B (steam) a cell, for water mostly one cell
// a kelvin, for steam between 1 and 25 bar some five, and 400 KB at most. The same
// box gives the same bits. A box that is empty or has no column in region 1 or 2
// gives f itself.
func Tabulate(f thermo.Fluid, T1, T2, p1, p2 float64) thermo.Fluid {
	T1, T2 = max(T1, lowestTemperature*(1+clear)), min(T2, region2MaxT)
	p1, p2 = max(p1, 1), min(p2, highestP)
	if !(T1 < T2 && p1 < p2) {
		return f
	}
	switch f.(type) {
	case liquid:
		b := liquidBuilder
		if c := b.columns(T1, T2, p1, p2); c != nil {
			return &liquidTable{T0: T1 + 0.5, columns: c}
		}
	case steam:
		b := steamBuilder
		if c := b.columns(T1, T2, p1, p2); c != nil {
			return &steamTable{T0: T1 + 0.5, columns: c}
		}
	}
	return f
}

// column is 1 K of temperature, with cells of equal height of pressure.
type column[C any] struct {
	p0, perPascal float64 // Pa, middle of the first cell; cells per Pa
	cells         []C     // none where saturation or another region is too near
}

type liquidTable struct {
	liquid
	T0      float64 // K, middle of the first column
	columns []column[liquidCell]
}

type steamTable struct {
	steam
	T0      float64
	columns []column[steamCell]
}

// nearest returns the whole number nearest to x, and what x is beyond it. A
// negative x and NaN give a number greater than that of any cell.
func nearest(x float64) (k uint64, rest float64) {
	const (
		shift = 3 << 51      // rounds x, into the lowest bits of the sum
		bits  = 0x4338 << 48 // those of the shift alone
	)
	whole := x + shift
	return math.Float64bits(whole) - bits, x - (whole - shift)
}

func (t *liquidTable) Balance(T, p float64) (thermo.Balance, error) {
	i, x := nearest(T - t.T0)
	if i >= uint64(len(t.columns)) {
		return t.liquid.Balance(T, p)
	}
	c := &t.columns[i]
	k, y := nearest((p - c.p0) * c.perPascal)
	if k >= uint64(len(c.cells)) {
		return t.liquid.Balance(T, p)
	}
	h, cp, density := c.cells[k].at(x, y)
	return thermo.Balance{Enthalpy: h, Cp: cp, Density: density}, nil
}

func (t *steamTable) Balance(T, p float64) (thermo.Balance, error) {
	i, x := nearest(T - t.T0)
	if i >= uint64(len(t.columns)) {
		return t.steam.Balance(T, p)
	}
	c := &t.columns[i]
	k, y := nearest((p - c.p0) * c.perPascal)
	if k >= uint64(len(c.cells)) {
		return t.steam.Balance(T, p)
	}
	h, cp, density := c.cells[k].at(x, y)
	return thermo.Balance{Enthalpy: h, Cp: cp, Density: p * density}, nil
}

func (t *liquidTable) At(T, p float64) (thermo.Properties, error) {
	return replaced(t.liquid, t, T, p)
}

func (t *steamTable) At(T, p float64) (thermo.Properties, error) {
	return replaced(t.steam, t, T, p)
}

// replaced puts the balance of a table in the place of that of its exact fluid. cv
// goes with cp, so that it does not pass it at 4 °C, where both are the same.
func replaced(exact thermo.Fluid, t thermo.Balancer, T, p float64) (thermo.Properties, error) {
	s, err := exact.At(T, p)
	if err != nil {
		return s, err
	}
	b, err := t.Balance(T, p)
	if b == (thermo.Balance{Enthalpy: s.Enthalpy, Cp: s.Cp, Density: s.Density}) {
		return s, err
	}
	return complete(b, p, b.Cp*(s.Cv/s.Cp)), err
}
