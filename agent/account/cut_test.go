package account

import (
	"math"
	"testing"

	"heatreeve/agent/loads"
)

// The parts of a record are good records, wherever it is cut, and add up to it.
func TestCut(t *testing.T) {
	whole := Record{Start: 0, End: hour, Lowest: -1, Highest: 3e6, Demand: 2e6, HasDemand: true}
	whole.Amounts = Amounts{Measured: hour, Latent: 7 * minute, Uncertain: 11 * minute, Given: 7e9, Served: 7e9, Uncertainty: Uncertainty{Variance: 9, Unparted: 3}, Witness: 6e9, Compared: 6.1e9}
	whole.Uncertainty.Parts[loads.PartInlet] = -5e6
	for _, r := range []Record{
		whole,
		{Start: 7 * hour, End: 8 * hour, Amounts: Amounts{Measured: 1234567890123, Bridged: 2365432109876, Given: 1, Taken: 1e12, Served: 1 - 1e12, BridgedGiven: 4, BridgedTaken: 5}},
		{Start: -hour, End: 0, Amounts: Amounts{Bridged: 1}},
		{Start: 0, End: hour},
	} {
		for a := r.Start; a < r.End; a += minute {
			for b := a + minute; b <= r.End; b += minute {
				var got sums
				for _, s := range []span{{r.Start - minute, a}, {a, b}, {b, r.End + minute}} {
					if s.end <= r.Start || s.start >= r.End {
						continue
					}
					part := r.Cut(s.start, s.end)
					if err := part.check(); err != nil {
						t.Fatal(err)
					}
					if start, end := part.holder(); start != r.Start || end != r.End || part.Lowest != r.Lowest || part.Highest != r.Highest || part.HasDemand && part != r {
						t.Fatalf("%+v of %+v", part, r)
					}
					got.add(&part.Amounts)
				}
				if sum := got.amounts(); !alike(&sum, &r.Amounts) {
					t.Fatalf("cut at %d and %d: %+v of %+v", a, b, sum, r.Amounts)
				}
			}
		}
	}
}

// alike tells whether two amounts are the same to rounding, and to some ns.
func alike(a, b *Amounts) bool {
	off := func(a, b float64) bool { return math.Abs(a-b) > 1e-12*math.Abs(b) }
	for i, x := range a.Uncertainty.Parts {
		if off(x, b.Uncertainty.Parts[i]) {
			return false
		}
	}
	for _, t := range [][2]int64{{a.Measured, b.Measured}, {a.Bridged, b.Bridged}, {a.Latent, b.Latent}, {a.Uncertain, b.Uncertain}} {
		if d := t[0] - t[1]; d < -3 || d > 3 {
			return false
		}
	}
	return !off(a.Given, b.Given) && !off(a.Taken, b.Taken) && !off(a.Served, b.Served) &&
		!off(a.BridgedGiven, b.BridgedGiven) && !off(a.BridgedTaken, b.BridgedTaken) &&
		!off(a.Uncertainty.Variance, b.Uncertainty.Variance) && !off(a.Uncertainty.Unparted, b.Uncertainty.Unparted) &&
		!off(a.Witness, b.Witness) && !off(a.Compared, b.Compared)
}
