package cause

import "slices"

// Beside is the evidence of a load together with that of the load on the other side of its
// exchanger, and with what both sides tell together. Of tells the figures that readings of
// both sides give, as for [Evidence.Signatures]: those of e first. What the other side's
// flow and inlet do to the deviation of e is not told, and they count as followed by what
// is expected.
func (e Evidence) Beside(other Evidence, x Exchanger, of func(readings [6]float64) (Effect, bool)) Evidence {
	e.OtherFlow, e.OtherInlet, e.OtherOutlet = other.Flow, other.Inlet, other.Outlet
	for _, o := range []*Operating{&e.OtherFlow, &e.OtherInlet, &e.OtherOutlet} {
		o.ByChange, o.Follows, o.Error = 0, true, Effect{}
	}
	e.Tests = slices.Concat(e.Tests, other.Tests)
	e.Marks = slices.Concat(e.Marks, other.Marks)
	e.Margins = slices.Concat(e.Margins, other.Margins)
	if o := &other.Steadiness; o.Known && !o.Steady && (e.Steadiness.Steady || !e.Steadiness.Known) {
		e.Steadiness = *o
	}
	e.Exchanger = x
	for _, o := range e.six() {
		if !o.Known {
			return e
		}
	}
	e.Signatures(of)
	return e
}
