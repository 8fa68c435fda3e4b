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

// pace decides how far event time has come. It follows the newest source stamp,
// less the lateness, and never runs ahead of the clock, so that a publisher with
// a fast clock cannot make the others late. While the broker is away it stands
// still, because what the broker kept is still to come; when the session is up
// and nothing comes, the clock takes over, set back by as much as the stamps have
// lately lagged behind it, so that publishers with slow clocks are not late for
// ever after a silence.
type pace struct {
	lateness time.Duration
	stamped  bool // the site has tags with source stamps: only those lead
	newest   int64
	through  int64
	heard    int64 // clock when readings last came, or the session last opened
	open     bool
	lag      lag
}

// reading notes a reading stamped at; fromSource says whether the stamp came from
// the payload.
func (p *pace) reading(at int64, fromSource bool, now int64) {
	p.heard = max(p.heard, now)
	if fromSource || !p.stamped {
		p.newest = max(p.newest, at)
		p.lag.note(now-at, now)
	}
}

// advance returns the instant up to which event time has come at the clock's
// now. Waiting says that messages are held back for want of an acknowledgement,
// so that silence means nothing.
func (p *pace) advance(now int64, connected, waiting bool) int64 {
	if connected != p.open || !connected || waiting {
		p.open, p.heard = connected, now
	}
	to := min(p.newest, now)
	if p.open && now-p.heard >= int64(quiet) {
		to = max(to, now-p.lag.least())
	}
	p.through = max(p.through, to-int64(p.lateness))
	return p.through
}

// lag keeps the least lag of stamps behind the clock, ns, over this lagSpan in
// which readings came and the one before.
type lag struct {
	begun        int64 // of this span; 0 before the first reading
	this, before int64
}

func (l *lag) note(d, now int64) {
	if l.begun == 0 || now-l.begun >= int64(lagSpan) {
		l.before = math.MaxInt64
		if l.begun != 0 {
			l.before = l.this
		}
		l.begun, l.this = now, math.MaxInt64
	}
	l.this = min(l.this, max(0, d))
}

// least returns the least lag; 0 before any reading.
func (l *lag) least() int64 {
	if l.begun == 0 {
		return 0
	}
	return min(l.this, l.before)
}
