package loads

import (
	"fmt"
	"math"

	"heatreeve/ingest/quality"
)

const (
	// leeway is by how much a count may exceed the largest rate of its counter: meters run
	// over their nominal flow for a while (common practice, no source).
	leeway = 1.1
	// largestRate bounds counters without a largest rate of their own, so that an absurd
	// number does not spoil a register: in W for energy; [largestMassFlow] stands for
	// those of flow, in their own units.
	largestRate = 1e12
)

// count is what a counter has told: that Amount passed in [From, To).
type count struct {
	At       int64        // stamp of the newest reading told; 0 before the first
	Value    float64      // of a counter that tells amounts, their sum so far
	Before   float64      // the reading before that
	From, To int64        // grid points that reached the last reading but one, and the last
	Amount   float64      // in the unit of the register
	Known    bool         // false after one reading alone, a reset, or more than can be
	Why      string       // it is not known
	Mark     quality.Mark // the worst of the two readings
	Of       quality.Mark // of the newest reading
	Broken   quality.Mark // bad, of a reading since, after which the register may have stood still
}

// rate is the mean flow of the count, a second.
func (c *count) rate() float64 { return c.Amount / (float64(c.To-c.From) / 1e9) }

// difference says what became of two readings of a register.
type difference uint8

const (
	risen       difference = iota
	reset                  // fell, and no roll-over explains it: the amount is unknown
	implausible            // rose by more than can have passed
)

// rise returns how far a register has come from one reading to a later one: a fall by
// more than half the modulus is a roll-over. Of numbers that step, one step more than
// the largest rate gives may show. Check: 99987.3 to 14.2 at a modulus of 100000 is
// 26.9, and 4294960000 to 1500 in 32 bits 8796 (arithmetic).
func (c *Counter) rise(from, to, step, largest float64, span int64) (float64, difference) {
	amount := to - from
	if amount < 0 {
		if -amount <= c.Modulus/2 || c.Modulus <= 0 {
			return 0, reset
		}
		amount += c.Modulus
	}
	if !(amount-step <= leeway*largest*float64(span)/1e9) {
		return 0, implausible
	}
	return amount, risen
}

// bounded is a counter of the plant with its largest rate.
type bounded struct {
	tag     int
	largest float64
}

// enlistCounters notes the tags that are registers.
func (e *Engine) enlistCounters() {
	for i := range e.cfg.Tags {
		c := e.cfg.Tags[i].Counter
		if c == nil {
			continue
		}
		largest := c.Largest
		if largest <= 0 {
			largest = largestRate
			if len(e.users[i]) > 0 {
				largest = largestMassFlow
			}
		}
		e.counters = append(e.counters, bounded{i, largest})
	}
}

// breaks reports whether a bad reading of a register says that it may not count, and not
// only that it was not read.
func breaks(m quality.Mark) bool {
	return m != quality.NoValue && m != quality.Offline && m != quality.StaleAtSource
}

// counts brings what the counters have told to g. One that reports by exception tells
// by its silence that nothing has passed, each time that the silence has lasted for
// its maximum age. A bad reading is no count: the next good one tells what has passed since
// the last, unless the bad one says that the register itself may have stood still, or has
// an amount of its own that nobody knows.
func (e *Engine) counts(g int64) {
	for _, b := range e.counters {
		t := &e.tags[b.tag]
		switch {
		case t.Held.bad():
			if breaks(t.Held.Mark) || e.cfg.Tags[b.tag].adds() {
				t.Count.Broken = t.Held.Mark
			}
		case t.Held.Has && t.Held.At != t.Count.At:
			e.tell(b, g)
		case g >= e.silentUntil(b.tag):
			t.Count.From, t.Count.To, t.Count.Amount, t.Count.Known = t.Count.To, g, 0, true
			t.Count.Before, t.Count.Mark = t.Count.Value, t.Count.Of
		}
	}
}

// silentUntil returns when the silence of a counter that reports by exception tells that
// nothing has passed; MaxInt64 where it tells nothing.
func (e *Engine) silentUntil(tag int) int64 {
	t := &e.tags[tag]
	if !e.cfg.Tags[tag].OnChange || t.Count.At == 0 || t.standing != holds || t.Held.bad() {
		return math.MaxInt64
	}
	return after(t.Count.To, e.cfg.Tags[tag].MaxAge)
}

// tell works the difference between the reading held at g and the one before.
func (e *Engine) tell(b bounded, g int64) {
	t, tag := &e.tags[b.tag], &e.cfg.Tags[b.tag]
	was := t.Count
	t.Count = count{At: t.Held.At, Value: t.Held.Value, Before: was.Value, From: was.To, To: g, Of: t.Held.Mark, Mark: quality.Worse(t.Held.Mark, was.Of)}
	c, from := &t.Count, was.Value
	if tag.Counter.Each {
		from, c.Value, c.Mark = 0, was.Value, t.Held.Mark
	}
	if was.At == 0 {
		c.Why = fmt.Sprintf("counter %q has told one count, and a flow takes two", tag.Name)
		return
	}
	if was.Broken != quality.None {
		c.Why = fmt.Sprintf("counter %q was bad since its count before, %v: what passed is not known", tag.Name, was.Broken)
		return
	}
	span := max(c.At-was.At, c.To-c.From)
	amount, d := tag.Counter.rise(from, t.Held.Value, tag.Resolution, b.largest, span)
	switch d {
	case risen:
		c.Amount, c.Known = amount, true
		if tag.Counter.Each {
			c.Value += amount
		}
	case reset:
		e.tally[b.tag].Reset++
		c.Why = fmt.Sprintf("counter %q fell from %.10g to %.10g: what passed is not known", tag.Name, from, t.Held.Value)
	case implausible:
		e.tally[b.tag].Implausible++
		seconds := float64(span) / 1e9
		c.Why = fmt.Sprintf("counter %q rose from %.10g to %.10g in %.4g s, in SI units: at most %.4g can have passed", tag.Name, from, t.Held.Value, seconds, leeway*b.largest*seconds+tag.Resolution)
	}
}

// counting reports whether the counter that tells a load's flow is alive at g.
func (e *Engine) counting(load int, g int64) bool {
	i := e.loads[load].terms.counter
	t, tag := &e.tags[i], &e.cfg.Tags[i]
	switch {
	case t.Held.bad() && (breaks(t.Held.Mark) || g >= e.unread(i)):
		return false
	case tag.OnChange:
		return t.standing == holds
	}
	return t.Held.bad() || t.Held.Has && g-t.Held.At < tag.MaxAge
}

// unread returns until when a counter whose newest reading is bad stands by what it has told
// before, by a count or by its silence.
func (e *Engine) unread(tag int) int64 {
	c := &e.tags[tag].Count
	switch {
	case c.At == 0:
		return 0
	case e.cfg.Tags[tag].OnChange:
		return after(c.To, e.cfg.Tags[tag].MaxAge)
	}
	return after(c.At, e.cfg.Tags[tag].MaxAge)
}

// uncounted marks f where the newest reading of the counter of the flow is bad, and returns
// false where the count before that does not stand any more.
func (e *Engine) uncounted(load int, f *Figure) bool {
	i := e.loads[load].terms.counter
	if e.counting(load, f.At) {
		f.Until = min(f.Until, e.unread(i))
		return true
	}
	f.mark(e.tags[i].Held.Mark, e.cfg.Tags[i].Name)
	*f = f.unusable(e.cfg.Tags[i].Name)
	return false
}

// flow reads the flow of a stream. Where it is counted it is one unit a second, for the
// figure to be scaled once the count is known, and its uncertainty that of a reading in
// proportion: what an error of the register has in common falls out of a difference.
func (e *Engine) flow(load int, f *Figure, flow *float64, d *doubt) bool {
	src := e.equations[load].Flow
	if e.loads[load].Counted != nil && e.tags[src.Tag].Held.bad() && !e.uncounted(load, f) {
		return false
	}
	if !e.read(f, src, flow, d) {
		return false
	}
	if e.loads[load].Counted != nil {
		relative := Accuracy{Rel: e.cfg.Tags[src.Tag].Accuracy.Rel}
		*flow, *d = 1, doubt{accuracy: relative.Standard(1)}
	}
	return true
}

// live returns the present figure of a load. Where the flow is counted it is worked with
// the mean flow between the last two counts, and nothing but a count is needed to tell
// that nothing flows.
func (e *Engine) live(load int) Figure {
	l := &e.loads[load]
	f := l.figure
	if l.Counted == nil || !l.counting {
		return f
	}
	c := &e.tags[l.terms.counter].Count
	switch {
	case !c.Known:
		f = f.fail(NoReading, c.Why)
		f.Drivers = l.figure.Drivers
		return f
	case c.Amount == 0:
		f = Figure{At: f.At, Idle: true, Until: f.Until, Drivers: f.Drivers}
	case f.Measured():
		f.scale(c.rate())
	}
	f.mark(c.Mark, e.cfg.Tags[l.terms.counter].Name)
	return f
}

// scale makes the figure of one unit of flow that of rate.
func (f *Figure) scale(rate float64) {
	f.Duty *= rate
	f.Uncertainty *= rate
	for p := range f.Share {
		f.Share[p] *= rate
	}
	f.Random *= rate
	f.Variance *= rate * rate
	f.MassFlow *= rate
}

// resolution is the standard uncertainty of a difference of two readings of a register
// that steps by r: of two roundings, each r/√12 (JCGM 100:2008, F.2.2.1).
func resolution(r float64) float64 { return r / math.Sqrt(6) }
