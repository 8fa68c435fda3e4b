package drift

import "math"

const (
	// memory is over how many values the scatter is told. Common practice, no source.
	memory = 500
	// mostLag bounds the correlation of successive values: what follows closer than that is
	// no scatter but a change.
	mostLag = 0.9
)

// Scale estimates how values scatter about a level that may move slowly: their variance about
// an average of the last of them, and by successive differences how far one value tells the
// next. Its fields are its state.
type Scale struct {
	N        int
	Mean     float64
	Variance float64 // about Mean
	Half     float64 // mean of half the square of successive differences
	Last     float64
}

// Observe takes in the next value. Once there have been some, what lies beyond three of the
// standard deviations that they had counts as three (winsorised, as P. J. Huber's Robust
// Statistics, 1981, has it): a shift is not taken for scatter, or it would hide itself.
func (s *Scale) Observe(x float64) {
	s.N++
	if s.N == 1 {
		s.Mean, s.Last = x, x
		return
	}
	w := max(1/float64(s.N), 1.0/memory)
	v := max(1/float64(s.N-1), 1.0/memory)
	apart, d := x-s.Last, x-s.Mean
	if s.N > settled {
		apart, d = within(apart, math.Sqrt(2*s.Half)), within(d, math.Sqrt(s.Variance))
	}
	s.Half += v * (apart*apart/2 - s.Half)
	s.Mean += w * d
	s.Variance += w * (d*d*(1-w) - s.Variance)
	s.Last = x
}

// settled is after how many values they tell a standard deviation to hold others against.
const settled = 20

// within keeps x within three standard deviations; of none there is nothing to keep it by.
func within(x, sigma float64) float64 {
	if !(sigma > 0) {
		return x
	}
	return max(-3*sigma, min(3*sigma, x))
}

// Lag is the correlation of successive values, 0 to 0.9: by the ratio of von Neumann (Annals
// of Mathematical Statistics 12, 1941), half the mean square of successive differences is the
// variance times 1 − ρ.
func (s *Scale) Lag() float64 {
	if s.N < 3 || s.Variance == 0 {
		return 0
	}
	return min(mostLag, max(0, 1-s.Half/s.Variance))
}

// Sigma is the standard deviation that sums of the values scatter by, as if each told nothing
// of the next: with the inflation √((1 + ρ)/(1 − ρ)) of a first-order autoregression (G. E. P.
// Box and G. M. Jenkins, Time Series Analysis, from memory).
func (s *Scale) Sigma() float64 {
	r := s.Lag()
	return math.Sqrt(s.Half/(1-r)) * math.Sqrt((1+r)/(1-r))
}
