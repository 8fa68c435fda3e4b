package agent

import (
	"math"
	"slices"
	"time"
)

const (
	// leastQuiet is how long the session must have been up and silent before the
	// clock alone moves event time: long enough for a broker to deliver what it
	// kept for us, and for a dead link to be found out. A broker that waits for an acknowledgement is silent from one
	// commit to the next, so quiet is longer than that.
	leastQuiet   = 15 * time.Second
	beyondCommit = 5 * time.Second
	// firstReach is how far behind the clock event time may begin: a stray stamp of
	// a clock that was never set must not open years of missing time.
	firstReach = 24 * time.Hour
	// longestWait is how long a broker is believed to hold back what leads.
	longestWait = 5 * time.Minute
	// graceAway is the longest that event time waits for one broker of several that is away:
	// a short loss costs nothing.
	graceAway = 20 * time.Second
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
//
// Of several brokers the one furthest ahead leads, but for as long as another is to
// deliver what it has kept: since it came back, or while it waits for us. One that is
// away is waited for a little while only, and then no more until it has caught up: what
// it has kept is late, unless it is of that while.
type pace struct {
	lateness time.Duration
	grace    time.Duration // how long a broker is waited for that is away
	stamped  bool          // the site has tags with source stamps
	through  int64
	sources  []source
	of       []int   // source of each tag
	last     []int64 // newest stamp of each tag among the readings that lead; 0: none
	lag      lag
}

// source is one broker.
type source struct {
	tags    int
	quiet   time.Duration // silence after which the clock takes over
	newest  int64
	heard   time.Time // when readings that lead last came, or the session last opened
	led     time.Time // when readings that lead last came
	open    bool
	opened  time.Time // when the session last opened
	away    time.Time // since when it is not open; zero: it is
	excused bool      // nobody waits for it
}

// standing is how it is with a broker: whether it is connected, and whether it keeps
// messages back for want of an acknowledgement, so that its silence means nothing.
type standing struct{ connected, heldBack bool }

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
	s := &p.sources[p.of[tag]]
	s.newest = max(s.newest, at)
	p.last[tag] = max(p.last[tag], at)
	s.heard, s.led = now, now
}

// advance returns the instant up to which event time has come at the clock's now, as it
// stands with each broker.
func (p *pace) advance(now time.Time, brokers ...standing) int64 {
	to, waits := int64(math.MinInt64), int64(math.MaxInt64)
	for i, b := range brokers[:len(p.sources)] {
		s := &p.sources[i]
		if s.tags == 0 {
			continue
		}
		comes := p.comes(i, now, b)
		to = max(to, comes)
		s.excuse(now, p.anyOther(i, brokers), p.grace)
		if !s.excused && (!b.connected || b.heldBack || s.fresh(now)) {
			waits = min(waits, comes)
		}
	}
	to = min(to, waits)
	if p.through <= 0 && p.anyNewest() {
		to = max(to, now.Add(-firstReach).UnixNano())
	}
	p.through = max(p.through, to-int64(p.lateness))
	return p.through
}

// comes returns how far event time would have come by source i alone. In a silence time goes by as it is measured
// between two looks at the clock, so that setting the clock moves nothing.
func (p *pace) comes(i int, now time.Time, b standing) int64 {
	s := &p.sources[i]
	b.heldBack = b.heldBack && now.Sub(s.led) < longestWait
	if b.connected && !s.open {
		s.opened = now
	}
	if b.connected != s.open || !b.connected || b.heldBack {
		s.open, s.heard = b.connected, now
	}
	to := min(s.newest, now.UnixNano())
	if s.fresh(now) {
		to = min(to, p.furthestBehind(i))
	}
	if silence := now.Sub(s.heard); s.open && silence >= s.quiet {
		to = max(to, s.heard.UnixNano()+int64(silence)-p.lag.least())
	}
	return to
}

// fresh tells whether the source has opened of late, so that what was kept is to come.
func (s *source) fresh(now time.Time) bool { return now.Sub(s.opened) < s.quiet }

// excuse decides whether to wait for the source; others says that another one is there.
func (s *source) excuse(now time.Time, others bool, grace time.Duration) {
	switch {
	case s.open:
		s.away = time.Time{}
		s.excused = s.excused && s.fresh(now)
	case s.away.IsZero():
		s.away = now
	case others && now.Sub(s.away) >= grace:
		s.excused = true
	}
}

func (p *pace) anyOther(i int, brokers []standing) bool {
	for k, s := range p.sources {
		if k != i && s.tags > 0 && brokers[k].connected {
			return true
		}
	}
	return false
}

func (p *pace) anyNewest() bool {
	return slices.ContainsFunc(p.sources, func(s source) bool { return s.newest > 0 })
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
	instants := []*time.Time{&p.lag.begun}
	for i := range p.sources {
		s := &p.sources[i]
		instants = append(instants, &s.heard, &s.led, &s.opened, &s.away)
	}
	for _, at := range instants {
		if !at.IsZero() {
			*at = at.Add(d)
		}
	}
	p.lag.shift(int64(d))
}

// furthestBehind returns the oldest of the newest stamps of a source's tags, of those that have led.
func (p *pace) furthestBehind(source int) int64 {
	oldest := int64(math.MaxInt64)
	for tag, at := range p.last {
		if at != 0 && p.of[tag] == source {
			oldest = min(oldest, at)
		}
	}
	return oldest
}

// newPace returns the pace of a site whose tags are of these sources, with the given
// lateness and commit interval.
func newPace(of []int, lateness, commit time.Duration, stamped bool) pace {
	p := pace{lateness: lateness, grace: graceAway, stamped: stamped, of: of, last: make([]int64, len(of))}
	p.sources = make([]source, slices.Max(of)+1)
	for i := range p.sources {
		p.sources[i].quiet = max(leastQuiet, commit+beyondCommit)
	}
	for _, i := range of {
		p.sources[i].tags++
	}
	return p
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
