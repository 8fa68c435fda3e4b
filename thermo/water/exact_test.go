package water

import (
	"math/big"
	"strconv"
)

// The release's sums in exact arithmetic: where large terms cancel, the printed
// form is not exact to 1e-12 in float64 itself.

const bits = 200

// decimal is the number that v was written as, free of float64's rounding.
func decimal(v float64) *big.Float {
	f, _, err := big.ParseFloat(strconv.FormatFloat(v, 'g', -1, 64), 10, bits, big.ToNearestEven)
	if err != nil {
		panic(err) // our own tables
	}
	return f
}

func binary(v float64) *big.Float      { return new(big.Float).SetPrec(bits).SetFloat64(v) }
func times(a, b *big.Float) *big.Float { return new(big.Float).SetPrec(bits).Mul(a, b) }
func over(a, b *big.Float) *big.Float  { return new(big.Float).SetPrec(bits).Quo(a, b) }
func minus(a, b *big.Float) *big.Float { return new(big.Float).SetPrec(bits).Sub(a, b) }

// ladder gives the powers of one number, each worked once.
type ladder map[int]*big.Float

func newLadder(x *big.Float) ladder {
	return ladder{0: binary(1), 1: x, -1: over(binary(1), x)}
}

func (l ladder) pow(k int) *big.Float {
	v, ok := l[k]
	if !ok {
		step := 1
		if k < 0 {
			step = -1
		}
		v = times(l.pow(k-step), l[step])
		l[k] = v
	}
	return v
}

// exactSums are the sums over n x^I y^J with the factors 1, I, J and so on.
type exactSums struct{ one, i, j, ii, jj, ij float64 }

func exactly(terms []term, x, y *big.Float) exactSums {
	lx, ly := newLadder(x), newLadder(y)
	var total [6]*big.Float
	for k := range total {
		total[k] = binary(0)
	}
	for _, t := range terms {
		v := times(decimal(t.n), times(lx.pow(int(t.i)), ly.pow(int(t.j))))
		i, j := float64(t.i), float64(t.j)
		for k, f := range [...]float64{1, i, j, i * (i - 1), j * (j - 1), i * j} {
			total[k].Add(total[k], times(v, binary(f)))
		}
	}
	var out [6]float64
	for k := range total {
		out[k], _ = total[k].Float64()
	}
	return exactSums{out[0], out[1], out[2], out[3], out[4], out[5]}
}

func exact1(T, p float64) gibbs {
	pi, tau := over(binary(p), binary(16.53e6)), over(binary(1386), binary(T))
	x, y := minus(decimal(7.1), pi), minus(tau, decimal(1.222))
	s := exactly(region1Terms[:], x, y)
	a, _ := over(pi, x).Float64()
	b, _ := over(tau, y).Float64()
	return gibbs{g: s.one, p: -a * s.i, t: b * s.j, pp: a * a * s.ii, tt: b * b * s.jj, pt: -a * b * s.ij}
}

func exact2(T, p float64) gibbs {
	tau := over(binary(540), binary(T))
	return exactGas(region2Ideal[:], region2Residual[:], p, tau, minus(tau, decimal(0.5)))
}

func exact5(T, p float64) gibbs {
	tau := over(binary(1000), binary(T))
	return exactGas(region5Ideal[:], region5Residual[:], p, tau, tau)
}

// exactGas leaves γ itself out.
func exactGas(ideal []idealTerm, residual []term, p float64, tau, y *big.Float) gibbs {
	terms := make([]term, len(ideal))
	for k, t := range ideal {
		terms[k] = term{n: t.n, j: t.j}
	}
	o := exactly(terms, binary(1), tau)
	r := exactly(residual, over(binary(p), binary(1e6)), y)
	b, _ := over(tau, y).Float64()
	return gibbs{p: 1 + r.i, t: o.j + b*r.j, pp: -1 + r.ii, tt: o.jj + b*b*r.jj, pt: b * r.ij}
}

func exact3(T, density float64) helmholtz {
	s := exactly(region3Terms[:], over(binary(density), binary(322)), over(decimal(647.096), binary(T)))
	return helmholtz{f: s.one, d: region3Log + s.i, t: s.j, dd: -region3Log + s.ii, tt: s.jj, dt: s.ij}
}
