// Package design judges whether a load's duty has left its design. It is pure:
// minutes of event time go in, a [Verdict] comes out.
//
// The rule, over the last minutes that the site calls "lasting":
//
//	deviation d = mean duty − design duty, allowance a = allow · design duty,
//	U = 2·u, the expanded uncertainty of the duty.
//
// Duty is over or short where every minute lies beyond the allowance on the
// same side and |d| > U. It is undecided where the minutes spread by more than
// the allowance (the load is not steady), where U is as wide as the allowance,
// or where minutes are missing or idle. It is holding where every minute lies
// within the allowance. Where some minutes lie within and some beyond, the last
// decided verdict stands. That all minutes must agree is what makes a deviation
// last; the comparison with U is the E_n criterion of ISO 13528 with a design
// taken as exact. The steadiness rule and the default of ten minutes are common
// practice, no source.
package design

import (
	"fmt"
	"math"
	"time"
)

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

// Target is the design of one load.
type Target struct {
	Duty    float64       // W; 0 where the load has no design
	Allow   float64       // allowance, as a fraction of Duty
	Lasting time.Duration // how long a deviation must last; whole minutes
}

// Minute is one minute of a load: the mean duty and its standard uncertainty in
// W by what lasts, and the variance in W² by what does not. Whole is false where part of
// it was missing or idle.
type Minute struct {
	Start       int64 // ns
	Whole       bool
	Duty        float64
	Uncertainty float64
	Random      float64
}

const nanosecondsPerMinute = int64(time.Minute)

// Judge follows one load. Its exported fields are its state, for saving.
type Judge struct {
	Last    Verdict // Undecided, Holding, Short or Over
	Minutes []Minute
	target  Target
	lasting int
}

// NewJudge returns a judge of a load with the given target. A lasting of less
// than a minute counts as one.
func NewJudge(t Target) *Judge {
	return &Judge{target: t, lasting: max(1, int(t.Lasting/time.Minute))}
}

// Restore takes over the saved state of an earlier judge of the same load.
func (j *Judge) Restore(last Verdict, minutes []Minute) {
	j.Last, j.Minutes = last, minutes
}

// Observe takes in the next minute. A minute that does not follow on the last
// one means that those between were missing.
func (j *Judge) Observe(m Minute) {
	if n := len(j.Minutes); n > 0 && m.Start != j.Minutes[n-1].Start+nanosecondsPerMinute {
		j.Minutes = j.Minutes[:0]
		j.Last = Undecided
	}
	j.Minutes = append(j.Minutes, m)
	if n := len(j.Minutes); n > j.lasting {
		j.Minutes = append(j.Minutes[:0], j.Minutes[n-j.lasting:]...)
	}
	j.Last = j.decide()
}

// Verdict returns the present verdict, given whether the load is blind or idle
// at this instant.
func (j *Judge) Verdict(blind, idle bool) Verdict {
	switch {
	case blind:
		return Blind
	case idle:
		return Idle
	}
	return j.Last
}

func (j *Judge) decide() Verdict { return j.Grounds().Verdict }

type summary struct{ mean, uncertainty, least, most float64 }

// summarise returns the mean duty, its uncertainty (systematic parts do not average out,
// random ones do) and the extremes; false where a minute is not whole.
func summarise(minutes []Minute) (summary, bool) {
	s := summary{least: math.Inf(1), most: math.Inf(-1)}
	var random float64
	for _, m := range minutes {
		if !m.Whole {
			return s, false
		}
		s.mean += m.Duty
		s.uncertainty += m.Uncertainty
		random += m.Random
		s.least, s.most = min(s.least, m.Duty), max(s.most, m.Duty)
	}
	n := float64(len(minutes))
	s.mean /= n
	s.uncertainty = math.Hypot(s.uncertainty, math.Sqrt(random)) / n
	return s, true
}
