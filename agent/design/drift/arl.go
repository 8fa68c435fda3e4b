package drift

import (
	"math"

	"gonum.org/v1/gonum/integrate/quad"
	"gonum.org/v1/gonum/mat"
)

const (
	// leastNodes of the quadrature give ten digits for k = 0.5 and h up to 12.
	leastNodes = 40
	// nodesEach is how many there are for each standard deviation of a wider h: with fewer the
	// density falls between them, and the run length comes out too long.
	nodesEach = 2.5
	// mostH bounds the equations to solve.
	mostH = 160
)

// ARL is the average number of values up to the first signal of a two-sided CUSUM of
// independent normal values with standard deviation 1 about mean, from sums of 0, for k ≥ 0
// and 0 < h ≤ 160; NaN beyond. Each side is solved from Page's integral equation (E. S. Page, Continuous
// inspection schemes, Biometrika 41, 1954) by Gauss–Legendre quadrature,
//
//	L(s) = 1 + L(0)·Φ(k − s − μ) + ∫₀ʰ L(y)·φ(y + k − s − μ) dy,
//
// and the two joined by 1/L = 1/L⁺ + 1/L⁻ (K. W. Kemp, Applied Statistics 10, 1961).
func ARL(k, h, mean float64) float64 {
	up, down := oneSided(k, h, mean), oneSided(k, h, -mean)
	return 1 / (1/up + 1/down)
}

func oneSided(k, h, mean float64) float64 {
	if !(h > 0 && h <= mostH) {
		return math.NaN()
	}
	nodes := max(leastNodes, int(math.Ceil(nodesEach*h)))
	x, w := make([]float64, nodes), make([]float64, nodes)
	quad.Legendre{}.FixedLocations(x, w, 0, h)
	n := nodes + 1 // the last unknown is L(0)
	a, b := mat.NewDense(n, n, nil), mat.NewVecDense(n, nil)
	for i := range n {
		s := 0.0
		if i < nodes {
			s = x[i]
		}
		for j := range nodes {
			a.Set(i, j, -w[j]*density(x[j]+k-s-mean))
		}
		a.Set(i, nodes, -below(k-s-mean))
		a.Set(i, i, a.At(i, i)+1)
		b.SetVec(i, 1)
	}
	var l mat.VecDense
	if err := l.SolveVec(a, b); err != nil || l.AtVec(nodes) < 1 {
		return math.Inf(1) // longer than float64 can tell
	}
	return l.AtVec(nodes)
}

func density(x float64) float64 { return math.Exp(-x*x/2) / math.Sqrt(2*math.Pi) }

func below(x float64) float64 { return math.Erfc(-x/math.Sqrt2) / 2 }

// Threshold is the h with which a two-sided CUSUM of slack k gives a false signal once in arl
// values on the mean, 2 to 1e8, within one part in a million; NaN where that takes h beyond 160, as
// it may for k below 0.045.
func Threshold(k, arl float64) float64 {
	arl = min(1e8, max(2, arl))
	low, high := 1e-3, 1.0
	for ARL(k, high, 0) < arl {
		low, high = high, min(2*high, mostH)
		if low == mostH {
			return math.NaN()
		}
	}
	for high-low > 1e-6*high {
		if h := (low + high) / 2; ARL(k, h, 0) < arl {
			low = h
		} else {
			high = h
		}
	}
	return (low + high) / 2
}
