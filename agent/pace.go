package agent

import (
	"math"
	"time"
)

const (
	// leastQuiet is how long the session must have been up and silent before the
	// clock alone moves event time: long enough for a broker to deliver what it
	// kept for us. A broker that waits for an acknowledgement is silent from one
	// commit to the next, so quiet is longer than that.
	leastQuiet   = 15 * time.Second
	beyondCommit = 5 * time.Second
	// firstReach is how far behind the clock event time may begin: a stray stamp of
	// a clock that was never set must not open years of missing time.
	firstReach = 24 * time.Hour
	// longestWait is how long a broker is believed to hold back what leads.
	longestWait = 5 * time.Minute
	// lagSpan is how long the least lag of the stamps behind the clock counts.
	lagSpan = 10 * time.Minute
)

// pace decides how far event time has come. It follows the newest stamp among the
// readings that lead, less the lateness, and never runs ahead of the clock, so that
// a publisher with a fast clock cannot make the others late. While the broker is
// away it stands still, because what the broker kept is still to come; when the
// session is up and nothing that leads comes, the clock takes over, set back by as
// much as the stamps have lately lagged behind it, so that publishers with slow
// clocks are not late for ever after a silence.
//
// What a broker kept comes tag by tag as it likes, so for a while after the session
// has opened the tag that is furthest behind leads, as long as the readings of the others
// have room to wait.
//
// Where the site has stamped tags, only stamped readings lead that came in the order
// in which the broker keeps messages: a bare number, a message without delivery
// guarantee or a retained one overtakes what is still kept for us.
type pace struct {
	lateness time.Duration
	quiet    time.Duration // silence after which the clock takes over
	stamped  bool          // the site has tags with source stamps
	newest   int64
	through  int64
	heard    time.Time // when readings that lead last came, or the session last opened
	led      time.Time // when readings that lead last came
	open     bool
	opened   time.Time // when the session last opened
	last     []int64   // newest stamp of each tag among the readings that lead; 0: none
	lag      lag
}

// reading notes a reading of a tag, stamped at. FromSource says whether the stamp came from the
// payload, inOrder whether nothing older was overtaken.
func (p *pace) reading(tag int, at int64, fromSource, inOrder bool, now time.Time) {
	if p.stamped && !fromSource {
		return
	}
	p.lag.note(now.UnixNano()-at, now)
	if p.stamped && !inOrder {
		return
	}
	p.newest = max(p.newest, at)
	p.last[tag] = max(p.last[tag], at)
	p.heard, p.led = now, now
}

// advance returns the instant up to which event time has come at the clock's
// now. HeldBack says that the broker keeps messages back for want of an
// acknowledgement, so that silence means nothing. In a silence time goes by as it is measured
// between two looks at the clock, so that setting the clock moves nothing.
func (p *pace) advance(now time.Time, connected, heldBack bool) int64 {
	heldBack = heldBack && now.Sub(p.led) < longestWait
	if connected && !p.open {
		p.opened = now
	}
	if connected != p.open || !connected || heldBack {
		p.open, p.heard = connected, now
	}
	to := min(p.newest, now.UnixNano())
	if now.Sub(p.opened) < p.quiet {
		to = min(to, p.furthestBehind())
	}
	if silence := now.Sub(p.heard); p.open && silence >= p.quiet {
		to = max(to, p.heard.UnixNano()+int64(silence)-p.lag.least())
	}
	if p.through <= 0 && p.newest > 0 {
		to = max(to, now.Add(-firstReach).UnixNano())
	}
	p.through = max(p.through, to-int64(p.lateness))
	return p.through
}

// press moves event time on to at, but not ahead of the clock: no more readings can wait for
// what has not come yet. It returns the instant up to which event time has come.
func (p *pace) press(at int64, now time.Time) int64 {
	p.through = max(p.through, min(at, now.UnixNano()))
	return p.through
}

// shift notes that the clock was set by d: what it showed before is counted anew, as
// if it had always been so.
func (p *pace) shift(d time.Duration) {
	for _, at := range []*time.Time{&p.heard, &p.led, &p.opened, &p.lag.begun} {
		if !at.IsZero() {
			*at = at.Add(d)
		}
	}
	p.lag.shift(int64(d))
}

// furthestBehind returns the oldest of the tags' newest stamps, of tags that have led.
func (p *pace) furthestBehind() int64 {
	oldest := int64(math.MaxInt64)
	for _, at := range p.last {
		if at != 0 {
			oldest = min(oldest, at)
		}
	}
	return oldest
}

// newPace returns the pace of a site with so many tags, the given lateness and commit
// interval.
func newPace(tags int, lateness, commit time.Duration, stamped bool) pace {
	return pace{lateness: lateness, quiet: max(leastQuiet, commit+beyondCommit), stamped: stamped, last: make([]int64, tags)}
}

// lag keeps the least lag of stamps behind the clock, ns, over this lagSpan in
// which readings came and the one before.
type lag struct {
	begun        time.Time // of this span; zero before the first reading
	this, before int64
}

func (l *lag) note(d int64, now time.Time) {
	if l.begun.IsZero() || now.Sub(l.begun) >= lagSpan {
		l.before = math.MaxInt64
		if !l.begun.IsZero() {
			l.before = l.this
		}
		l.begun, l.this = now, math.MaxInt64
	}
	l.this = min(l.this, max(0, d))
}

// shift notes that the clock was set by d ns: stamps lag by so much more.
func (l *lag) shift(d int64) {
	for _, x := range []*int64{&l.this, &l.before} {
		if *x != math.MaxInt64 {
			*x = max(0, *x+d)
		}
	}
}

// least returns the least lag; 0 before any reading.
func (l *lag) least() int64 {
	if l.begun.IsZero() {
		return 0
	}
	return min(l.this, l.before)
}
