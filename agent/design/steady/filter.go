// Package steady tells whether what is measured is steady: by the R-statistic and by the
// slope through the last values, and whether the change that they show matters. It is pure.
package steady

// Filters of the R-statistic: of the mean, of the variance about it, and of the variance by
// successive differences. S. Cao and R. R. Rhinehart, An efficient method for on-line
// identification of steady state, J. Process Control 5 (1995); the values are from memory.
const (
	byMean       = 0.2
	byVariance   = 0.1
	byDifference = 0.1
)

// Rejects and Accepts are the R beyond which a state is not steady any more, and below which
// it is again; between them it stays as it was. Under steady white noise R exceeds 2.5 in
// fewer than one of a thousand values; the customary pair is 2.5 to 3 and 0.8 to 0.9 (from
// memory). A lower one than 1 would leave half of all steady values undecided, and so
// steadiness is accepted below 1.5 here.
const (
	Rejects = 2.5
	Accepts = 1.5
)

// stuck is how many values that do not differ at all are no information any more: by then
// the filters have forgotten seven eighths of what was before. Common practice, no source.
const stuck = 20

// Filter is the R-statistic of one signal: the ratio of its variance about a moving mean to
// that by successive differences, near 1 where it is steady with white noise, and greater
// where it moves. Its fields are its state.
type Filter struct {
	N              int // values taken in
	Mean, Last     float64
	About, Between float64
	Moves          bool
	Same           int // last values that were equal to the one before
}

// Observe takes in the next value:
//
//	v ← λ₂(x − xf)² + (1 − λ₂)v, xf ← λ₁x + (1 − λ₁)xf, d ← λ₃(x − x₋₁)² + (1 − λ₃)d,
//	R = (2 − λ₁)·v/d
func (f *Filter) Observe(x float64) {
	f.N++
	if f.N == 1 {
		f.Mean, f.Last = x, x
		return
	}
	f.About += byVariance * ((x-f.Mean)*(x-f.Mean) - f.About)
	f.Mean += byMean * (x - f.Mean)
	if f.Same++; x != f.Last {
		f.Same = 0
	}
	f.Between += byDifference * ((x-f.Last)*(x-f.Last) - f.Between)
	f.Last = x
	switch r, known := f.R(); {
	case !known:
		f.Moves = false
	case r > Rejects:
		f.Moves = true
	case r < Accepts:
		f.Moves = false
	}
}

// R is the statistic; it is not known where the signal has not moved at all through the last 20
// values, as one that is stuck. That is no information: neither steadiness nor its contrary.
// Both variances then fade alike and tell of nothing but what was before.
func (f *Filter) R() (r float64, known bool) {
	if !(f.Between > 0) || f.Same >= stuck {
		return 0, false
	}
	return (2 - byMean) * f.About / f.Between, true
}
