package design

import (
	"fmt"
	"hash/fnv"
	"math"
	"time"

	"heatreeve/agent/design/expect"
	"heatreeve/agent/design/steady"
)

// Target is the design of one load.
type Target struct {
	Name    string
	Allow   float64       // allowance, as a fraction of the expected duty; 0 where the load has no design
	Lasting time.Duration // how long a deviation must last; whole minutes
	// FalseWarnings is how many warnings a year of a load without fault are put up with; 0 is 1.
	FalseWarnings float64
	// Expect tells what is expected. It is nil where the load has no design, and where what
	// is expected is the exchanger's to tell, which ByExchanger says.
	Expect      expect.Expectation
	ByExchanger bool
	Point       Point // where the stream should run
	Tags        Tags
	// WitnessError is the standard uncertainty of what the witness counts, as a fraction, and
	// WitnessStep the step of its counter, J; both 0 where the load has none.
	WitnessError, WitnessStep float64
}

// Tags are those that a stream is worked from, by name; empty for a constant.
type Tags struct{ Flow, Inlet, Outlet string }

// designed tells whether anything is expected of the load.
func (t *Target) designed() bool { return t.Expect != nil || t.ByExchanger }

// minutes is how many a deviation must last.
func (t *Target) minutes() int { return max(1, int(t.Lasting/time.Minute)) }

// Judge follows one load. Its exported fields are its state, for saving.
type Judge struct {
	Of      uint64  // of the target; see fingerprint
	Last    Verdict // Undecided, Holding, Short or Over
	Window  []Seen  // the last minutes in a row, at most as many as a deviation must last
	Gate    steady.Gate
	Drift   Monitor
	Block   int   // minutes of Window that are of the present block of the monitor
	Rests   int64 // since when the load has rested; 0 where it has not
	Witness Attest
	// Conditions are those of the last minute, by which its duty was expected.
	Conditions expect.Conditions
	Roll       // the warnings that stand
	target     Target
	lasting    int
	grounds    Grounds
	exchange   *Exchange // that the load is a side of, 0 the hot one; nil for none
	side       int
	beside     *Judge // of the other side
}

// NewJudge returns a judge of a load with the given target. A lasting of less
// than a minute counts as one.
func NewJudge(t Target) *Judge { return newJudge(t, make(limits)) }

func newJudge(t Target, l limits) *Judge {
	j := &Judge{Of: fingerprint(t), target: t, lasting: t.minutes()}
	j.Drift = l.monitor(j.lasting, t.FalseWarnings)
	j.decide()
	return j
}

// meets makes the load a side of an exchanger, and beside the judge of the other side.
func (j *Judge) meets(x *Exchange, side int, beside *Judge) {
	j.exchange, j.side, j.beside = x, side, beside
}

// Observe takes in the next minute with what is expected of it. A minute that does not
// follow on the last one means that those between were missing.
func (j *Judge) Observe(m *Minute, e expect.Expected) {
	if n := len(j.Window); n > 0 && m.Start != j.Window[n-1].Start+nanosecondsPerMinute {
		j.lapse()
	}
	j.Witness.observe(m)
	j.sense(m)
	j.rest(m)
	seen := compare(m, e)
	seen.Moving = m.Whole && !j.Gate.Now.Steady
	j.Window = append(j.Window, seen)
	if n := len(j.Window); n > j.lasting {
		j.Window = append(j.Window[:0], j.Window[n-j.lasting:]...)
	}
	j.decide()
	j.Last = j.grounds.Verdict
	j.follow(&j.grounds)
	j.warn(&j.grounds)
}

// lapse begins afresh after minutes that were missing.
func (j *Judge) lapse() {
	j.Window = j.Window[:0]
	j.Last, j.Block = Undecided, 0
	j.Gate.Reset()
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

// rest notes since when the load has rested.
func (j *Judge) rest(m *Minute) {
	switch {
	case !m.Idle:
		j.Rests = 0
	case j.Rests == 0:
		j.Rests = m.Start
	}
}

// fingerprint tells one design from another: two that expect the same by the same figures
// have the same.
func fingerprint(of any) uint64 {
	h := fnv.New64a()
	fmt.Fprintf(h, "%+v", of)
	return h.Sum64()
}

// restore takes up a saved state.
func (j *Judge) restore(was Judge) {
	if was.Of != j.Of {
		j.Roll = was.Roll
		return
	}
	was.target, was.lasting, was.Drift.limit = j.target, j.lasting, j.Drift.limit
	was.exchange, was.side, was.beside = j.exchange, j.side, j.beside
	*j = was
	j.decide()
}

const (
	// leastGate and mostGate bound the minutes through which the slopes of a load are laid.
	leastGate, mostGate = 5, 60
	// usualAllowance is that by which a load without a design is called steady. Common
	// practice, no source.
	usualAllowance = 0.1
)

// sense tells from the minutes up to m whether the load is steady: a stream by its flow and
// its temperatures, a vessel by its duty.
func (j *Judge) sense(m *Minute) {
	if !m.Whole {
		j.Gate.Reset()
		return
	}
	allow := j.target.Allow
	if allow == 0 {
		allow = usualAllowance
	}
	window, limit := min(mostGate, max(leastGate, j.lasting)), allow*math.Abs(m.Duty)
	if m.Flow == 0 {
		j.Gate.Observe(window, limit, steady.Sample{Name: "duty", Value: m.Duty, By: 1})
		return
	}
	c := m.capacity()
	j.Gate.Observe(window, limit,
		steady.Sample{Name: "flow", Value: m.Flow, By: m.Duty / m.Flow},
		steady.Sample{Name: "inlet", Value: m.Inlet, By: c},
		steady.Sample{Name: "outlet", Value: m.Outlet, By: c},
	)
}
