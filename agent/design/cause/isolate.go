package cause

import (
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// A single fault is told from others by the generalised likelihood ratio: with statistics r
// of covariance V that are nought without a fault, and the signature d of a fault of size b,
//
//	left = min over b of (r − b·d)ᵀ V⁻¹ (r − b·d) = rᵀV⁻¹r − (dᵀV⁻¹r)² / dᵀV⁻¹d
//
// and the fault with the least left over is the likeliest. With one statistic every fault
// leaves nothing: all are alike. Narasimhan and Mah, AIChE J. 33 (1987) 1514 (from memory).

// signatureError is how far a signature may be off, as a fraction: it is a derivative at
// one state. Common practice, no source.
const signatureError = 0.05

// apart is how much more must be left over by one fault than by another for the figures to
// tell the two apart: the quantile of 95 % of chi-square with one degree of freedom.
const apart = 3.841

// statistic is a figure that is nought without a fault.
type statistic struct {
	name, unit string
	Estimate
	short bool                // its uncertainty is by what changes only
	by    func(fault) float64 // what a unit of the fault does to it
}

// fault is one thing that may have gone wrong.
type fault struct {
	kind     Kind
	tag      string
	words    string
	unit     string
	effect   Effect  // of a unit
	lasting  float64 // standard uncertainty of its size before anything goes wrong, by what lasts
	scatter  float64 // and by what changes
	falls    bool    // it can be negative only
	isDesign bool    // a fall of the conductance, not an instrument
	stranger bool    // an instrument that the duty does not use
}

// found is a fault as the statistics show it.
type found struct {
	fault
	size, uncertainty float64
	left              float64 // what it leaves over of the sum of squares, scaled
	explains          float64 // part of the sum of squares, 0 to 1
	likelihood        float64 // beside the likeliest
}

// isolation is what the statistics tell.
type isolation struct {
	statistics []statistic
	whitened   []float64 // the statistics, made independent with unit variance
	whiten     func([]float64) []float64
	total      float64 // their sum of squares
	scale      float64 // 1 / (1 + (signatureError)²·total)
	signalled  bool    // it is known that they are not by chance
}

// byTest is the probability from which the global test says that statistics are not by chance.
const byTest = 0.95

// significance is the probability that the statistics are not by chance; 0 where they
// pass the global test, at 95 % of chi-square, and no monitor says otherwise.
func (s *isolation) significance() float64 {
	if len(s.statistics) == 0 {
		return 0
	}
	p := s.chance()
	switch {
	case s.signalled:
		return max(p, byTest)
	case p >= byTest:
		return p
	}
	return 0
}

// chance is the probability with which statistics of no fault lie nearer to nought; 0 of none.
func (s *isolation) chance() float64 {
	if len(s.statistics) == 0 {
		return 0
	}
	return distuv.ChiSquared{K: float64(len(s.statistics))}.CDF(s.total)
}

// isolate weighs the statistics with the covariance that the faults' own uncertainties
// give them.
func isolate(statistics []statistic, faults []fault) *isolation {
	n := len(statistics)
	s := &isolation{statistics: statistics, scale: 1}
	if n == 0 {
		s.whiten = func([]float64) []float64 { return nil }
		return s
	}
	var root mat.Cholesky
	if !root.Factorize(covariance(statistics, faults)) { // figures beyond what numbers hold
		return isolate(nil, nil)
	}
	var lower mat.TriDense
	root.LTo(&lower)
	s.whiten = func(x []float64) []float64 { return solveLower(&lower, x) }
	r := make([]float64, n)
	for i, t := range statistics {
		r[i] = t.Value
	}
	s.whitened = s.whiten(r)
	s.total = dot(s.whitened, s.whitened)
	s.scale = 1 / (1 + signatureError*signatureError*s.total)
	return s
}

// covariance of the statistics: what the instruments share, and for the rest of its
// variance each its own.
func covariance(statistics []statistic, faults []fault) *mat.SymDense {
	n := len(statistics)
	V := mat.NewSymDense(n, nil)
	for i := range statistics {
		for j := i; j < n; j++ {
			if statistics[i].short == statistics[j].short {
				V.SetSym(i, j, shared(&statistics[i], &statistics[j], faults))
			}
		}
		u2 := statistics[i].Uncertainty * statistics[i].Uncertainty
		V.SetSym(i, i, max(V.At(i, i), u2)*(1+1e-6)) // so that two of the same cannot make it singular
	}
	return V
}

func shared(a, b *statistic, faults []fault) float64 {
	var sum float64
	for _, f := range faults {
		u := f.lasting
		if a.short {
			u = f.scatter
		}
		sum += a.by(f) * b.by(f) * u * u
	}
	return sum
}

// solveLower returns L⁻¹x.
func solveLower(lower *mat.TriDense, x []float64) []float64 {
	y := make([]float64, len(x))
	for i := range x {
		sum := x[i]
		for j := range i {
			sum -= lower.At(i, j) * y[j]
		}
		y[i] = sum / lower.At(i, i)
	}
	return y
}

// signature is what a unit of the fault does to the statistics, whitened.
func (s *isolation) signature(f fault) []float64 {
	d := make([]float64, len(s.statistics))
	for i, t := range s.statistics {
		d[i] = t.by(f)
	}
	return s.whiten(d)
}

// fit returns how well a fault explains the statistics; false where it moves none of them,
// or only the way that it cannot go.
func (s *isolation) fit(f fault) (found, bool) {
	d := s.signature(f)
	dd, dr := dot(d, d), dot(d, s.whitened)
	if !(dd > 0) || !finite(dd, dr, dr/dd, 1/math.Sqrt(dd)) || dr == 0 || f.falls && dr > 0 {
		return found{}, false
	}
	gain := min(dr/dd*dr, s.total)
	return found{
		fault: f, size: dr / dd, uncertainty: 1 / math.Sqrt(dd),
		left: (s.total - gain) * s.scale, explains: gain / s.total,
	}, true
}

// cleared tells that an error of the given size in the instrument would show.
func (s *isolation) cleared(f fault, size float64) bool {
	d := s.signature(f)
	return size*size*dot(d, d)-2*size*dot(d, s.whitened) > apart
}

func dot(a, b []float64) float64 {
	var sum float64
	for i := range a {
		sum += a[i] * b[i]
	}
	return sum
}
