// Package quality says how far a reading can be relied on: good, uncertain or bad, as
// in IEC 62541 (OPC UA), and why.
//
// What a source says of its own reading, in the codes of several trades, becomes a
// [Mark]; so does what the tests on a signal find. A mark is one byte, is kept in the
// history with its reading, and never changes its meaning.
package quality

import (
	"fmt"
	"slices"
)

// Quality is how far a reading, or a figure worked from readings, can be relied on:
// the severities of a status code of IEC 62541-4, section 7.39. A greater one is worse.
type Quality uint8

const (
	Good      Quality = iota // may be used
	Uncertain                // may be used, and what is worked from it says so
	Bad                      // is not used, and what needs it has no figure
)

func (q Quality) String() string {
	switch q {
	case Good:
		return "good"
	case Uncertain:
		return "uncertain"
	case Bad:
		return "bad"
	}
	return fmt.Sprintf("Quality(%d)", uint8(q))
}

// Mark is a quality with its reason: the quality in the two highest bits, the reason
// below them. The zero value is good.
type Mark uint8

const reasonBits = 6

// The marks. Their numbers are kept in histories: new ones take new numbers, and none
// is used twice.
const (
	None Mark = 0 // good, and there is nothing to tell

	Maintenance Mark = Mark(Good)<<reasonBits | 1 // good, but the device asks for maintenance: M of NAMUR NE 107

	// Said by the source, or by its signal.
	Doubted    Mark = Mark(Uncertain)<<reasonBits | 1 // uncertain, without a reason that is known here
	LastUsable Mark = Mark(Uncertain)<<reasonBits | 2 // the last value from before a disturbance
	Substitute Mark = Mark(Uncertain)<<reasonBits | 3 // a value put in by hand or by a program
	OffSpec    Mark = Mark(Uncertain)<<reasonBits | 4 // out of specification: S of NAMUR NE 107
	BelowSpan  Mark = Mark(Uncertain)<<reasonBits | 5 // a current below 4 mA that is no failure: NAMUR NE 43
	AboveSpan  Mark = Mark(Uncertain)<<reasonBits | 6 // a current above 20 mA that is no failure: NAMUR NE 43
	Inaccurate Mark = Mark(Uncertain)<<reasonBits | 7 // the sensor says that it is not accurate now
	Limited    Mark = Mark(Uncertain)<<reasonBits | 8 // held at the lowest or highest value that the source can tell

	// Found by a test on one signal.
	Implausible Mark = Mark(Uncertain)<<reasonBits | 16 // within the instrument's range, outside the plausible one
	TooFast     Mark = Mark(Uncertain)<<reasonBits | 17 // changes faster than the quantity can
	Stuck       Mark = Mark(Uncertain)<<reasonBits | 18 // has not moved for too long
	Spike       Mark = Mark(Uncertain)<<reasonBits | 19 // far from its neighbours

	// Found by a test across signals.
	Disagrees  Mark = Mark(Uncertain)<<reasonBits | 32 // differs from the sensor beside it
	NotZero    Mark = Mark(Uncertain)<<reasonBits | 33 // reads where there is nothing, such as a flow with the pump off
	WrongOrder Mark = Mark(Uncertain)<<reasonBits | 34 // inlet and outlet temperatures stand the wrong way round

	// Said by the source, or by its signal.
	Rejected      Mark = Mark(Bad)<<reasonBits | 1 // bad, without a reason that is known here
	Failed        Mark = Mark(Bad)<<reasonBits | 2 // a failure: F of NAMUR NE 107, a failure current of NE 43, BadSensorFailure
	FunctionCheck Mark = Mark(Bad)<<reasonBits | 3 // a function check or manual operation: C of NAMUR NE 107
	NoValue       Mark = Mark(Bad)<<reasonBits | 4 // null: the source has no value
	Offline       Mark = Mark(Bad)<<reasonBits | 5 // the source has gone
	StaleAtSource Mark = Mark(Bad)<<reasonBits | 6 // the source says that its value is out of date
	OutOfService  Mark = Mark(Bad)<<reasonBits | 7 // the source is not in use
	Refused       Mark = Mark(Bad)<<reasonBits | 8 // the source has a new value, which was refused, so that the one before holds no longer
)

// Quality is that of the mark.
func (m Mark) Quality() Quality { return Quality(m >> reasonBits) }

// words are the reasons as people and metrics read them.
var words = map[Mark]string{
	None: "good", Maintenance: "maintenance-due",
	Doubted: "doubted-by-source", LastUsable: "last-usable", Substitute: "substitute", OffSpec: "out-of-specification",
	BelowSpan: "below-span", AboveSpan: "above-span", Inaccurate: "not-accurate", Limited: "limited-at-source",
	Implausible: "implausible", TooFast: "too-fast", Stuck: "stuck", Spike: "spike",
	Disagrees: "disagrees", NotZero: "not-zero", WrongOrder: "wrong-order",
	Rejected: "rejected-by-source", Failed: "failure", FunctionCheck: "function-check", NoValue: "no-value",
	Offline: "offline", StaleAtSource: "stale-at-source", OutOfService: "out-of-service", Refused: "refused-value",
}

// Marks lists all that there are but [None], by their numbers.
func Marks() []Mark {
	var all []Mark
	for m := range words {
		if m != None {
			all = append(all, m)
		}
	}
	slices.Sort(all)
	return all
}

// String is the reason's word, such as "stuck".
func (m Mark) String() string {
	if w, ok := words[m]; ok {
		return w
	}
	return fmt.Sprintf("%v-%d", m.Quality(), uint8(m)&(1<<reasonBits-1))
}

// Worse returns the mark of the worse quality, a where they are equally bad and a says
// anything.
func Worse(a, b Mark) Mark {
	if b.Quality() > a.Quality() || a == None {
		return b
	}
	return a
}
