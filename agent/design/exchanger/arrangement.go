// Package exchanger tells what a heat exchanger does and what it should: the effectiveness
// of an arrangement by its number of transfer units, the conductance of a clean one at
// today's flows, what two measured streams say of the conductance and of fouling, and how
// fouling grows. It is pure.
//
// The method is that of effectiveness and NTU (W. M. Kays and A. L. London, Compact Heat
// Exchangers; F. P. Incropera et al., Fundamentals of Heat and Mass Transfer, ch. 11):
//
//	Φ = ε·Cmin·(T_hot,in − T_cold,in),  NTU = UA/Cmin,  C = Cmin/Cmax
//
// with the capacity rate of a stream its mass flow times its cp. Quantities are SI: K, W, W/K,
// kg/s, J/(kg K); a resistance is that of the whole exchanger, K/W.
package exchanger

import (
	"fmt"
	"math"
)

// Kind is how the two streams pass each other.
type Kind uint8

// The kinds. Of crossflow either both streams are unmixed across their flow, or one of them
// is mixed.
const (
	Counterflow Kind = iota
	Parallel         // both streams in the same direction
	Shells           // shells in series, in counterflow, of an even number of tube passes each
	Crossflow        // both streams unmixed
	HotMixed         // crossflow, the hot stream mixed
	ColdMixed        // crossflow, the cold stream mixed
)

// Arrangement is a kind; of [Shells] with their number, below 1 counting as 1.
type Arrangement struct {
	Kind   Kind
	Number int
}

func (a Arrangement) String() string {
	switch a.Kind {
	case Counterflow:
		return "counterflow"
	case Parallel:
		return "parallel"
	case Shells:
		return fmt.Sprintf("shells %d", a.shells())
	case Crossflow:
		return "crossflow"
	case HotMixed:
		return "hot mixed"
	case ColdMixed:
		return "cold mixed"
	}
	return fmt.Sprintf("Kind(%d)", uint8(a.Kind))
}

func (a Arrangement) shells() int { return max(1, a.Number) }

// LimitError says that no exchanger of the arrangement has the effectiveness: it is at or
// beyond Limit, that of an exchanger without end, or not above zero.
type LimitError struct {
	Arrangement          Arrangement
	C                    float64 // ratio of the capacity rates
	Effectiveness, Limit float64
}

func (e *LimitError) Error() string {
	return fmt.Sprintf("effectiveness %.4g is out of range of %v with capacity rates in the ratio %.4g; allowed: above 0, below %.4g",
		e.Effectiveness, e.Arrangement, e.C, e.Limit)
}

// Effectiveness is ε at ntu ≥ 0 and the ratio c of the capacity rates, 0 to 1. hotIsMin
// tells whether the hot stream has the smaller one, which matters where one stream is
// mixed. It is NaN outside the range.
func (a Arrangement) Effectiveness(ntu, c float64, hotIsMin bool) float64 {
	switch {
	case !(ntu >= 0) || !(c >= 0 && c <= 1):
		return math.NaN()
	case ntu == 0:
		return 0
	case c < 1e-9: // condensing, evaporating or a huge flow: all are alike
		return -math.Expm1(-ntu)
	}
	switch a.Kind {
	case Counterflow:
		return counter(ntu, c)
	case Parallel:
		return -math.Expm1(-ntu*(1+c)) / (1 + c)
	case Shells:
		return inSeries(oneShell(ntu/float64(a.shells()), c), c, a.shells())
	case Crossflow:
		return unmixed(ntu, c)
	}
	if a.maxMixed(hotIsMin) {
		return -math.Expm1(c*math.Expm1(-ntu)) / c
	}
	return -math.Expm1(math.Expm1(-c*ntu) / c)
}

// maxMixed tells of crossflow with one stream mixed whether that is the stream of the greater
// capacity rate.
func (a Arrangement) maxMixed(hotIsMin bool) bool { return (a.Kind == HotMixed) != hotIsMin }

// counter is ε = (1 − E)/(1 − C·E), E = exp(−NTU·(1 − C)), with numerator and denominator
// divided by 1 − C: so it has no pole at C = 1, where it is NTU/(1 + NTU), and loses no digits
// near it.
func counter(ntu, c float64) float64 {
	m := ntu
	if d := 1 - c; d > 0 {
		m = -math.Expm1(-ntu*d) / d
	}
	return m / (1 + c*m)
}

// oneShell is ε of one shell with an even number of tube passes.
func oneShell(ntu, c float64) float64 {
	g := math.Hypot(1, c)
	return 2 / (1 + c + g/math.Tanh(ntu*g/2))
}

// inSeries is ε of n shells in series that have eps each: (z − 1)/(z − C), z = [(1 − ε₁·C)/(1
// − ε₁)]ⁿ. Divided by 1 − C as well, it is q/(1 + q), q = (z − 1)/(1 − C).
func inSeries(eps, c float64, n int) float64 {
	d, s := 1-c, eps/(1-eps)
	q := float64(n) * s
	if d > 0 {
		q = math.Expm1(float64(n)*math.Log1p(s*d)) / d
	}
	if math.IsInf(q, 1) {
		return 1
	}
	return q / (1 + q)
}

// farNTU is beyond what any exchanger has.
const farNTU = 500

// unmixed is ε of crossflow with both streams unmixed, exactly, by the series of J. L. Mason
// (Proc. 2nd US National Congress of Applied Mechanics, 1955):
//
//	ε = 1/(C·NTU)·Σ P(n, NTU)·P(n, C·NTU),  P(n, x) = 1 − e⁻ˣ·Σ_{m≤n} xᵐ/m!
//
// That is the mean of the lesser of two Poisson numbers, over C·NTU; beyond farNTU it is by
// their normal law, where the two differ by less than 3e-6.
func unmixed(ntu, c float64) float64 {
	if ntu > farNTU {
		return normalLesser(ntu, c*ntu) / (c * ntu)
	}
	eps, _ := mason(ntu, c)
	return eps
}

// mason is the series with its derivative by NTU.
func mason(ntu, c float64) (eps, slope float64) {
	x, y := ntu, c*ntu
	tx, ty := math.Exp(-x), math.Exp(-y) // e⁻ˣ·xⁿ/n!, the derivative of P(n, x)
	px, py := -math.Expm1(-x), -math.Expm1(-y)
	var sum, rise float64
	for n := 1.0; ; n++ {
		s := px * py
		sum += s
		rise += tx*py + c*px*ty
		if n > y && s <= 1e-16*sum {
			return sum / y, (rise - sum/x) / y
		}
		tx *= x / n
		ty *= y / n
		px, py = max(0, px-tx), max(0, py-ty)
	}
}

// normalLesser is the mean of the lesser of two independent normal numbers whose means a ≥ b
// are their variances too (C. E. Clark, Operations Research 9, 1961).
func normalLesser(a, b float64) float64 {
	theta := math.Sqrt(a + b)
	alpha := (a - b) / theta
	density := math.Exp(-alpha*alpha/2) / math.Sqrt(2*math.Pi)
	return a*math.Erfc(alpha/math.Sqrt2)/2 + b*math.Erfc(-alpha/math.Sqrt2)/2 - theta*density
}

// Limit is what the effectiveness tends to as NTU grows without bound.
func (a Arrangement) Limit(c float64, hotIsMin bool) float64 {
	if !(c >= 0 && c <= 1) {
		return math.NaN()
	}
	if c < 1e-9 {
		return 1
	}
	switch a.Kind {
	case Counterflow, Crossflow:
		return 1
	case Parallel:
		return 1 / (1 + c)
	case Shells:
		return inSeries(2/(1+c+math.Hypot(1, c)), c, a.shells())
	}
	if a.maxMixed(hotIsMin) {
		return -math.Expm1(-c) / c
	}
	return -math.Expm1(-1 / c)
}
