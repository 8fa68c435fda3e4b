// Package design judges whether a load's duty has left its design. It is pure:
// minutes of event time go in, verdicts, warnings and their grounds come out.
//
// The rule, over the last minutes that the site calls "lasting", each with the duty Q that
// was measured and the duty E that was expected of it at that minute's conditions:
//
//	deviation d = Q − E, allowance a = allow · |E|,
//	U = 2·u, the expanded uncertainty of the mean of d.
//
// Duty is over or short where every minute lies beyond the allowance on the
// same side and |mean d| > U. It is undecided where the load is not steady, where U is as
// wide as the allowance, or where minutes are missing or idle or nothing is expected of
// them. It is holding where every minute lies within the allowance. Where some minutes lie
// within and some beyond, the last decided verdict stands. That all minutes must agree is
// what makes a deviation last; the comparison with U is the E_n criterion of ISO 13528. The
// default of ten minutes is common practice, no source.
//
// A [Monitor] beside it follows smaller deviations that stay, and an [Exchange] those of two
// streams that serve one exchanger.
package design

import "fmt"

// Verdict is the state of a load against its design.
type Verdict uint8

const (
	Undecided Verdict = iota // the figures do not allow a verdict
	Holding                  // within the allowance
	Short                    // less duty than design
	Over                     // more duty than design
	Idle                     // nothing to speak of flows
	Blind                    // an input is missing or bad
)

// Verdicts lists them all, in the order in which they are shown.
var Verdicts = [...]Verdict{Holding, Short, Over, Undecided, Idle, Blind}

func (v Verdict) String() string {
	switch v {
	case Undecided:
		return "undecided"
	case Holding:
		return "holding"
	case Short:
		return "short"
	case Over:
		return "over"
	case Idle:
		return "idle"
	case Blind:
		return "blind"
	}
	return fmt.Sprintf("Verdict(%d)", uint8(v))
}
