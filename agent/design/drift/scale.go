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

// Observe takes in the next value.
func (s *Scale) Observe(x float64) {
	s.N++
	if s.N == 1 {
		s.Mean, s.Last = x, x
		return
	}
	w := max(1/float64(s.N), 1.0/memory)
	v := max(1/float64(s.N-1), 1.0/memory)
	s.Half += v * ((x-s.Last)*(x-s.Last)/2 - s.Half)
	d := x - s.Mean
	s.Mean += w * d
	s.Variance += w * (d*d*(1-w) - s.Variance)
	s.Last = x
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
