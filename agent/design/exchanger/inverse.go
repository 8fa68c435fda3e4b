package exchanger

import "math"

// mostNTU is up to where an inverse is told; beyond it an effectiveness is at its limit to all
// digits that can be measured.
const mostNTU = 100

// NTU is the inverse of [Arrangement.Effectiveness]: in closed form, but of unmixed crossflow
// by iteration. The error is a *[LimitError]; nothing is clipped.
func (a Arrangement) NTU(eps, c float64, hotIsMin bool) (float64, error) {
	limit := a.Limit(c, hotIsMin)
	if !(eps > 0 && eps < limit) {
		return 0, &LimitError{a, c, eps, limit}
	}
	if ntu := a.inverse(eps, c, hotIsMin); ntu < mostNTU {
		return ntu, nil
	}
	return 0, &LimitError{a, c, eps, limit}
}

// inverse is NTU at an effectiveness below the limit.
func (a Arrangement) inverse(eps, c float64, hotIsMin bool) float64 {
	if c < 1e-9 {
		return -math.Log1p(-eps)
	}
	switch a.Kind {
	case Counterflow:
		return logQuotient(eps/(1-eps), 1-c)
	case Parallel:
		return -math.Log1p(-eps*(1+c)) / (1 + c)
	case Shells:
		return shellsNTU(eps, c, a.shells())
	case Crossflow:
		return unmixedNTU(eps, c)
	}
	if a.maxMixed(hotIsMin) {
		return -math.Log1p(math.Log1p(-eps*c) / c)
	}
	return -math.Log1p(c*math.Log1p(-eps)) / c
}

// logQuotient is ln(1 + x·d)/d, and x where d is zero.
func logQuotient(x, d float64) float64 {
	if d == 0 {
		return x
	}
	return math.Log1p(x*d) / d
}

// shellsNTU is the inverse of [inSeries] and then of [oneShell].
func shellsNTU(eps, c float64, n int) float64 {
	d, q := 1-c, eps/(1-eps)
	s := q / float64(n)
	if d > 0 {
		s = math.Expm1(math.Log1p(q*d)/float64(n)) / d
	}
	g := math.Hypot(1, c)
	return 2 * math.Atanh(g/(2*(1+s)/s-1-c)) / g * float64(n)
}

// unmixedNTU inverts unmixed by Newton's method, from the NTU of counterflow, which is less:
// ε rises ever less steeply, so each step stays below the solution, and none overshoots.
func unmixedNTU(eps, c float64) float64 {
	ntu := logQuotient(eps/(1-eps), 1-c)
	for range 100 {
		if !(ntu < mostNTU) {
			return math.Inf(1)
		}
		at, slope := mason(ntu, c)
		step := (eps - at) / slope
		if ntu += step; step <= 1e-12*ntu {
			return ntu
		}
	}
	return math.NaN()
}
