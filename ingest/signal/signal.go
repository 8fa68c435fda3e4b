// Package signal turns the raw signal of an instrument into the quantity that it stands
// for: a loop current, the resistance of a platinum thermometer, a differential pressure
// of which the flow is the square root.
//
// Each conversion knows one reading and no other, so that the same number means the same
// in whatever order numbers come, and again after a restart. What the signal itself tells
// of the reading, such as the current of a broken transmitter, is its mark.
package signal

import (
	"math"

	"heatreeve/ingest/quality"
)

// The limits of NAMUR NE 43 (2003), mA, as several makers quote them: from 3.8 to 20.5 a
// current is a measurement, below 3.6 or above 21.0 the transmitter tells of its failure.
const (
	least, most = 3.6, 21.0
	zero, full  = 4.0, 20.0
)

// Within is the lowest and the highest share of the span that a current which is no failure
// stands for: -2.5 % and 106.25 %.
func Within() (lo, hi float64) { return share(least), share(most) }

func share(mA float64) float64 { return (mA - zero) / (full - zero) }

// NE43 is what NAMUR NE 43 says of a current in mA, slack being by how much a zero or a
// full span may be off and still be one.
//
// The bands from 3.6 to 3.8 and from 20.5 to 21.0 mA are neither measurement nor failure
// there, and it is usual to keep what was said before for some seconds. That would depend on
// the readings before, so here a current in them is what it is beside them: below or above
// its span, and uncertain. A transmitter that ramps to its failure current is then uncertain
// for a reading or two before it has failed.
func NE43(mA, slack float64) quality.Mark {
	switch {
	case !(mA >= least && mA <= most):
		return quality.Failed
	case mA < zero-slack:
		return quality.BelowSpan
	case mA > full+slack:
		return quality.AboveSpan
	}
	return quality.None
}

// Current is a signal of 4 to 20 mA that is linear in its quantity:
//
//	x = Lo + (I − 4 mA)/16 mA · (Hi − Lo)
//
// beyond the span as well, as far as [NE43] calls it no failure.
type Current struct {
	Lo, Hi float64 // SI, at 4 and at 20 mA
	Slack  float64 // mA; see [NE43]
}

// Convert returns the quantity at so many mA; NaN of a failure.
func (c Current) Convert(mA float64) (float64, quality.Mark) {
	m := NE43(mA, c.Slack)
	if m == quality.Failed {
		return math.NaN(), m
	}
	return c.Lo + share(mA)*(c.Hi-c.Lo), m
}

// Root is the signal of a differential-pressure meter, whose flow is the square root of it:
//
//	q = Full · √((x − Zero)/Span)
//
// and nothing at or below CutOff, since the root makes much of little: a thousandth of the
// pressure is three hundredths of the flow. A pressure the other way round by more than that
// is no flow, and says that the zero of the instrument is off.
type Root struct {
	Full       float64 // SI, the flow at the whole of Span
	Zero, Span float64 // the signal without flow, and what a full flow adds to it
	CutOff     float64 // share of Full at or below which nothing is taken to flow
	Current    bool    // the signal is a current in mA, to which NE 43 applies
	Slack      float64 // mA; see [NE43]
}

// RootOfCurrent is the root of a signal of 4 to 20 mA.
func RootOfCurrent(fullFlow, cutOff, slack float64) Root {
	return Root{Full: fullFlow, Zero: zero, Span: full - zero, CutOff: cutOff, Current: true, Slack: slack}
}

// Convert returns the flow at the signal x; NaN of a failure.
func (r Root) Convert(x float64) (float64, quality.Mark) {
	m := quality.None
	if r.Current {
		m = NE43(x, r.Slack)
	}
	part := (x - r.Zero) / r.Span
	switch {
	case m == quality.Failed || math.IsNaN(part):
		return math.NaN(), m
	case part <= r.CutOff*r.CutOff:
		if !r.Current && part < -r.CutOff*r.CutOff {
			m = quality.BelowSpan
		}
		return 0, m
	}
	return r.Full * math.Sqrt(part), m
}
