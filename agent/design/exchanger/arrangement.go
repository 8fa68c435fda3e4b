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
	if (a.Kind == HotMixed) != hotIsMin { // the stream of the greater rate is mixed
		return -math.Expm1(c*math.Expm1(-ntu)) / c
	}
	return -math.Expm1(math.Expm1(-c*ntu) / c)
}

func counter(ntu, c float64) float64 {
	if 1-c < 1e-9 {
		return ntu / (1 + ntu)
	}
	e := math.Exp(-ntu * (1 - c))
	return (1 - e) / (1 - c*e)
}

// oneShell is ε of one shell with an even number of tube passes.
func oneShell(ntu, c float64) float64 {
	g := math.Hypot(1, c)
	e := math.Exp(-ntu * g)
	return 2 / (1 + c + g*(1+e)/(1-e))
}

// inSeries is ε of n shells in series that have eps each.
func inSeries(eps, c float64, n int) float64 {
	if n == 1 {
		return eps
	}
	if 1-c < 1e-9 {
		return float64(n) * eps / (1 + float64(n-1)*eps)
	}
	z := math.Pow((1-eps*c)/(1-eps), float64(n))
	return (z - 1) / (z - c)
}

// unmixed is ε of crossflow with both streams unmixed, exactly, by the series of J. L. Mason
// (Proc. 2nd US National Congress of Applied Mechanics, 1955):
//
//	ε = 1/(C·NTU)·Σ P(n, NTU)·P(n, C·NTU),  P(n, x) = 1 − e⁻ˣ·Σ_{m≤n} xᵐ/m!
func unmixed(ntu, c float64) float64 {
	x, y := ntu, c*ntu
	tx, ty := math.Exp(-x), math.Exp(-y)
	px, py := -math.Expm1(-x), -math.Expm1(-y)
	var sum float64
	for n := 1; n < 2000; n++ {
		s := px * py
		sum += s
		if s < 1e-16*sum {
			break
		}
		tx *= x / float64(n)
		ty *= y / float64(n)
		px, py = max(0, px-tx), max(0, py-ty)
	}
	return sum / y
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
	if (a.Kind == HotMixed) != hotIsMin {
		return -math.Expm1(-c) / c
	}
	return -math.Expm1(-1 / c)
}

// mostNTU is up to where an inverse is looked for; beyond it an effectiveness is at its limit
// to all digits that can be measured.
const mostNTU = 100

// NTU is the inverse of [Arrangement.Effectiveness], in closed form or by bisection to a part
// in 10¹². The error is a *[LimitError]; nothing is clipped.
func (a Arrangement) NTU(eps, c float64, hotIsMin bool) (float64, error) {
	limit := a.Limit(c, hotIsMin)
	if !(eps > 0 && eps < limit) {
		return 0, &LimitError{a, c, eps, limit}
	}
	var ntu float64
	switch {
	case c < 1e-9:
		ntu = -math.Log1p(-eps)
	case a.Kind == Counterflow && 1-c < 1e-9:
		ntu = eps / (1 - eps)
	case a.Kind == Counterflow:
		ntu = math.Log((1-eps*c)/(1-eps)) / (1 - c)
	case a.Kind == Parallel:
		ntu = -math.Log1p(-eps*(1+c)) / (1 + c)
	default:
		ntu = a.bisect(eps, c, hotIsMin)
	}
	if !(ntu < mostNTU) {
		return 0, &LimitError{a, c, eps, limit}
	}
	return ntu, nil
}

func (a Arrangement) bisect(eps, c float64, hotIsMin bool) float64 {
	low, high := 0.0, 1.0
	for high < mostNTU && a.Effectiveness(high, c, hotIsMin) < eps {
		low, high = high, 2*high
	}
	for range 60 {
		mid := (low + high) / 2
		if a.Effectiveness(mid, c, hotIsMin) < eps {
			low = mid
		} else {
			high = mid
		}
		if high-low < 1e-12*high {
			break
		}
	}
	return (low + high) / 2
}
