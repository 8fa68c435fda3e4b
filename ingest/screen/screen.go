// Package screen tests the readings of one signal against what the quantity can do: its
// plausible range, how fast it changes, whether it moves at all, and whether a reading
// stands far from its neighbours.
//
// Each test is a pure state machine on readings in the order of their stamps: the same
// readings give the same marks, however they came and wherever the state was saved. The
// marks are those of package quality; all of them are uncertain, and none is bad, for a
// reading that looks odd may be true.
package screen

import (
	"math"

	"heatreeve/ingest/quality"
)

// Limits are what a signal is tested against, SI and ns. The zero value tests nothing.
type Limits struct {
	// Low and High bound what is plausible, where HasRange: a reading beyond is
	// [quality.Implausible].
	Low, High float64
	HasRange  bool
	// Fastest is the greatest rate of change, a second; 0 for any. See [Limits.Judge].
	Fastest float64
	// StuckAfter is after how long a signal that has not moved by more than Resolution is
	// [quality.Stuck]; 0 for never. A quantity that stands at zero, as a flow may, is not.
	StuckAfter int64
	// Spikes says that a reading far from its neighbours is set aside; see [Hampel].
	Spikes bool
	// Resolution is the step of the signal's numbers, 0 where unknown.
	Resolution float64
	// Gap is after how long without a reading all begins anew: what is so far apart has
	// nothing to do with each other.
	Gap int64
}

// None reports whether nothing is tested.
func (l *Limits) None() bool {
	return !l.HasRange && l.Fastest <= 0 && l.StuckAfter <= 0 && !l.Spikes
}

// State is what the tests remember of one signal. The zero value is that before the first
// reading. It can be saved and taken up again by exported fields alone.
type State struct {
	Newest int64     // stamp of the newest reading
	Base   at        // the newest reading that did not come too fast
	Last   at        // the newest reading
	Run    int       // readings in a row, the newest last, that came too fast and agree with each other
	Still  span      // of the readings up to the newest in which the signal has not moved
	Recent []float64 // the newest readings, at most the window of the spikes
}

type at struct {
	At    int64
	Value float64
}

// span is the range of values since an instant.
type span struct {
	Since     int64
	Low, High float64
	Readings  int
}

// accepted is how many readings in a row must agree on a new level for it to be taken as
// a step of the quantity (common practice: two or three).
const accepted = 3

// Judge tests the next reading, whose stamp must be later than all before, and returns its
// mark: the first that applies of implausible, too fast, stuck, spike. A spike is to be set
// aside; every other reading may be used.
//
// A reading is too fast that differs from the last one that was not by more than Fastest
// times the time between them and one step of Resolution. The third in a row that came too
// fast, each of which can follow from the one before, is a step of the quantity and is not
// marked.
func (l *Limits) Judge(s *State, stamp int64, value float64) (m quality.Mark, aside bool) {
	if s.Newest != 0 && l.Gap > 0 && stamp-s.Newest >= l.Gap {
		*s = State{Recent: s.Recent[:0]}
	}
	first := s.Newest == 0
	s.Newest = stamp
	if l.HasRange && !(value >= l.Low && value <= l.High) {
		m = quality.Implausible
	}
	if l.Fastest > 0 && l.tooFast(s, at{stamp, value}, first) {
		m = quality.Worse(m, quality.TooFast)
	}
	if l.StuckAfter > 0 && l.stuck(&s.Still, stamp, value) {
		m = quality.Worse(m, quality.Stuck)
	}
	if l.Spikes && l.spike(s, value) {
		m, aside = quality.Worse(m, quality.Spike), true
	}
	return m, aside
}

func (l *Limits) tooFast(s *State, x at, first bool) bool {
	last := s.Last
	s.Last = x
	switch {
	case first || l.follows(s.Base, x):
		s.Run = 0
	case s.Run > 0 && l.follows(last, x):
		s.Run++
	default:
		s.Run = 1
	}
	if s.Run == 0 || s.Run >= accepted {
		s.Base, s.Run = x, 0
		return false
	}
	return true
}

// follows reports whether the quantity can go from one reading to the other.
func (l *Limits) follows(from, to at) bool {
	return math.Abs(to.Value-from.Value) <= l.Fastest*float64(to.At-from.At)/1e9+l.step()
}

// step is Resolution with what the way over units leaves beyond its digits.
func (l *Limits) step() float64 { return l.Resolution * (1 + 1e-6) }

// leastStill is how many readings must show that a signal stands.
const leastStill = 3

func (l *Limits) stuck(s *span, stamp int64, value float64) bool {
	low, high := min(s.Low, value), max(s.High, value)
	if s.Readings == 0 || !(high-low <= l.step()) {
		*s = span{Since: stamp, Low: value, High: value, Readings: 1}
		return false
	}
	s.Low, s.High = low, high
	s.Readings++
	zero := low <= l.step() && high >= -l.step()
	return stamp-s.Since >= l.StuckAfter && s.Readings >= leastStill && !zero
}
