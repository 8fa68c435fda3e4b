package account

import "math"

// Cut returns the part of r from one instant to another, where r reaches beyond them. Heat
// and times are divided by length, as if they came evenly throughout: an estimate that
// keeps the sum of parts. The two instants must have some of r between
// them. The extremes are still those of all of r, and a part tells nothing of demand.
func (r Record) Cut(from, to int64) Record {
	from, to = max(from, r.Start), min(to, r.End)
	if from == r.Start && to == r.End {
		return r
	}
	if r.seen == (span{}) {
		r.seen = span{r.Start, r.End}
	}
	upTo := func(x, t int64) int64 {
		return int64(math.Floor(float64(x) * (float64(t-r.Start) / float64(r.End-r.Start))))
	}
	between := func(x int64) int64 { return upTo(x, to) - upTo(x, from) }
	part := r
	part.Start, part.End = from, to
	part.Demand, part.HasDemand = 0, false
	covered := min(to-from, between(r.Measured+r.Bridged)) // rounding may add 1 ns
	part.Measured = min(covered, between(r.Measured))
	part.Bridged = covered - part.Measured
	part.Latent = min(part.Measured, between(r.Latent))
	part.Uncertain = min(part.Measured, between(r.Uncertain))
	part.scale(float64(to-from) / float64(r.End-r.Start))
	return part
}

// scale leaves a share of the heats and of their uncertainty.
func (a *Amounts) scale(share float64) {
	for _, x := range [...]*float64{
		&a.Given, &a.Taken, &a.BridgedGiven, &a.BridgedTaken, &a.Served, &a.Witness, &a.Compared,
		&a.Uncertainty.Variance, &a.Uncertainty.Unparted,
	} {
		*x *= share
	}
	for i := range a.Uncertainty.Parts {
		a.Uncertainty.Parts[i] *= share
	}
}

// span is where the extremes of a cut record were seen; zero for one that is whole.
type span struct{ start, end int64 }

// holder returns the bounds of the record that holds the extremes.
func (r *Record) holder() (start, end int64) {
	if r.seen == (span{}) {
		return r.Start, r.End
	}
	return r.seen.start, r.seen.end
}
