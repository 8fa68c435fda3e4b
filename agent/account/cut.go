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
	covered := min(to-from, upTo(r.Measured+r.Bridged, to)-upTo(r.Measured+r.Bridged, from)) // rounding may add 1 ns
	part := r
	part.Start, part.End = from, to
	part.Measured = min(covered, upTo(r.Measured, to)-upTo(r.Measured, from))
	part.Bridged = covered - part.Measured
	share := float64(to-from) / float64(r.End-r.Start)
	part.Given, part.Taken = r.Given*share, r.Taken*share
	return part
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
