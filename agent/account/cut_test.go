package account

import (
	"math"
	"testing"
)

// The parts of a record are good records, wherever it is cut, and add up to it.
func TestCut(t *testing.T) {
	for _, r := range []Record{
		{Start: 0, End: hour, Measured: hour, Given: 7e9, Duty: 2e6, Lowest: -1, Highest: 3e6, Uncertainty: 9},
		{Start: 7 * hour, End: 8 * hour, Measured: 1234567890123, Bridged: 2365432109876, Given: 1, Taken: 1e12},
		{Start: -hour, End: 0, Bridged: 1},
		{Start: 0, End: hour},
	} {
		for a := r.Start; a < r.End; a += minute {
			for b := a + minute; b <= r.End; b += minute {
				var got Record
				for _, s := range []span{{r.Start - minute, a}, {a, b}, {b, r.End + minute}} {
					if s.end <= r.Start || s.start >= r.End {
						continue
					}
					part := r.Cut(s.start, s.end)
					if err := part.check(); err != nil {
						t.Fatal(err)
					}
					if start, end := part.holder(); start != r.Start || end != r.End || part.Lowest != r.Lowest || part.Highest != r.Highest || part.Duty != r.Duty || part.Uncertainty != r.Uncertainty {
						t.Fatalf("%+v of %+v", part, r)
					}
					got.Measured += part.Measured
					got.Bridged += part.Bridged
					got.Given += part.Given
					got.Taken += part.Taken
				}
				if off := func(a, b float64) bool { return math.Abs(a-b) > 1e-12*b }; math.Abs(float64(got.Measured-r.Measured)) > 3 || math.Abs(float64(got.Bridged-r.Bridged)) > 3 || off(got.Given, r.Given) || off(got.Taken, r.Taken) {
					t.Fatalf("cut at %d and %d: %+v of %+v", a, b, got, r)
				}
			}
		}
	}
}
