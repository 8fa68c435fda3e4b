package agent

import (
	"math"
	"time"
)

const (
	// quiet is how long the session must have been up and silent before the
	// clock alone moves event time: long enough for a broker to deliver what it
	// kept for us.
	quiet = 15 * time.Second
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
// Where the site has stamped tags, only stamped readings lead that came in the order
// in which the broker keeps messages: a bare number, a message without delivery
// guarantee or a retained one overtakes what is still kept for us.
type pace struct {
	lateness time.Duration
	stamped  bool // the site has tags with source stamps
	newest   int64
	through  int64
	heard    time.Time // when readings that lead last came, or the session last opened
	open     bool
	lag      lag
}

// reading notes a reading stamped at. FromSource says whether the stamp came from the
// payload, inOrder whether nothing older was overtaken.
func (p *pace) reading(at int64, fromSource, inOrder bool, now time.Time) {
	if p.stamped && !fromSource {
		return
	}
	p.lag.note(now.UnixNano()-at, now)
	if p.stamped && !inOrder {
		return
	}
	p.newest = max(p.newest, at)
	p.heard = now
}

// advance returns the instant up to which event time has come at the clock's
// now. Waiting says that messages are held back for want of an acknowledgement,
// so that silence means nothing. In a silence time goes by as it is measured
// between two looks at the clock, so that setting the clock moves nothing.
func (p *pace) advance(now time.Time, connected, waiting bool) int64 {
	if connected != p.open || !connected || waiting {
		p.open, p.heard = connected, now
	}
	to := min(p.newest, now.UnixNano())
	if silence := now.Sub(p.heard); p.open && silence >= quiet {
		to = max(to, p.heard.UnixNano()+int64(silence)-p.lag.least())
	}
	p.through = max(p.through, to-int64(p.lateness))
	return p.through
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

// least returns the least lag; 0 before any reading.
func (l *lag) least() int64 {
	if l.begun.IsZero() {
		return 0
	}
	return min(l.this, l.before)
}
