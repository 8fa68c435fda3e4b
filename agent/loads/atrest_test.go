package loads

import (
	"math"
	"math/rand/v2"
	"testing"
)

// A tank at rest whose thermometer scatters by 0.05 K, with a reading each 10 s and a rate
// over 10 minutes: what a day of it puts into either register, in parts of what one standard
// uncertainty of the duty would give, for a steady duty of so many of them. From the normal
// distribution: with nothing taken for rest, scatter alone puts φ(0) = 0.399 into each;
// with the two standard uncertainties that are, φ(2) = 0.054; with an IdleBelow of four,
// 1e-4. Of a duty of 1, 2, 3 and 4 of them 40, 70, 92 and 99 % are booked.
func TestVesselAtRest(t *testing.T) {
	const days, sigma = 8.0, 0.05
	n := 60.0
	one := 500 * 4000 * sigma * math.Sqrt(12/(n*(n*n-1))) / 10 // W
	for _, tt := range []struct {
		duty, idleBelow float64 // in standard uncertainties
		raw, taken, tol float64 // booked, if nothing were at rest, and as it is
	}{
		{0, 0, 0.399, 0.054, 0.03},
		{0, 4, 0.399, 0, 0.001},
		{1, 0, 1.083, 0.401, 0.06},
		{2, 0, 2.008, 1.399, 0.08},
		{3, 0, 3.000, 2.766, 0.08},
		{4, 0, 4.000, 3.963, 0.08},
	} {
		random := rand.New(rand.NewPCG(5, 6))
		v := tank()
		v.IdleBelow = tt.idleBelow * one
		cfg := closed(v)
		cfg.Grid = 10 * second
		e := engine(t, cfg)
		var raw float64
		for s := 0.0; s <= days*24*hours; s += 10 {
			T := 320 + tt.duty*one/(500*4000)*s + sigma*random.NormFloat64()
			e.Advance(Beat{[]Reading{{Tag: 0, At: through(s), Value: T}}, through(s)}, nil)
			raw += max(0, e.Snapshot().Loads[0].Figure.Rate) * 500 * 4000 * 10
		}
		l := e.Snapshot().Loads[0]
		time := float64(l.Measured) / 1e9 * one
		near(t, "taken without rest", raw/time, tt.raw, max(tt.tol, 0.03))
		near(t, "taken", l.Taken/time, tt.taken, tt.tol)
		if tt.duty == 0 {
			near(t, "given", l.Given/time, tt.taken, tt.tol)
		}
	}
}
