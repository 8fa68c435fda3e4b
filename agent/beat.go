package agent

import (
	"context"
	"fmt"
	"runtime/debug"
	"slices"
	"time"

	"heatreeve/ingest"
	"heatreeve/store"
)

const (
	// trimEvery is how often the history's bounds are looked at.
	trimEvery = 10 * time.Minute
	// eagerReadings is how many readings are committed without waiting for the
	// interval.
	eagerReadings = 20_000
	// pieceReadings is how many readings go through the accounts at one time.
	pieceReadings = 1000
	// tryAgain is the longest time between two tries to write to a disk that takes
	// nothing.
	tryAgain = 10 * time.Second
	// mostLag bounds how far behind the clock stamps may lag for a figure still to
	// count as live: beyond it is not a slow clock but an old message.
	mostLag = 2 * time.Minute
)

// rhythm is the state of the beat's loop.
type rhythm struct {
	pace      pace
	books     *ledger
	intakes   []*intake
	readings  []ingest.Reading
	standings []standing    // of the brokers
	shifted   time.Duration // of the clock, as the pace knows
	committed time.Time     // system clock
	trimmed   time.Time
	late      []bool // tags whose first late reading has been told
}

// newRhythm begins where the books stand.
func (a *Agent) newRhythm(books *ledger, now time.Time) *rhythm {
	r := &rhythm{
		pace:  newPace(brokerOf(a.site), a.site.Timing.Lateness, a.site.Timing.Commit, hasStamps(a.site)),
		books: books, intakes: a.intakes, standings: make([]standing, len(a.intakes)),
		committed: now, trimmed: now, late: make([]bool, len(a.site.Tags)),
	}
	r.pace.grace = grace(a.site)
	s := books.accounts.engine.Snapshot()
	r.pace.through = s.Through
	for i, t := range s.Tags {
		if a.site.Tags[i].Time != "" {
			r.pace.last[i] = t.Newest
		}
	}
	return r
}

// wakeful reports whether the next look should not wait for the beat.
func (r *rhythm) wakeful() bool {
	return r.books.fault != "" || slices.ContainsFunc(r.intakes, func(f *intake) bool { return f.window.wakeful() })
}

// beats moves the accounts forward until ctx ends, then commits what is left.
func (a *Agent) beats(ctx context.Context, books *ledger) error {
	notify("READY=1")
	defer notify("STOPPING=1")
	debug.FreeOSMemory() // what only the start needed
	r := a.newRhythm(books, time.Now())
	a.tellFuture(r.pace.through)
	a.endMetrics(r, books.accounts.engine.Snapshot())
	ticker, look := time.NewTicker(a.site.Timing.Beat), time.NewTimer(lookEvery)
	defer ticker.Stop()
	defer look.Stop()
	a.beat(r, time.Now())
	for looking := true; ; {
		if !looking && r.wakeful() {
			looking = true
			look.Reset(lookEvery)
		}
		select {
		case <-ticker.C:
			if !looking {
				a.look(r, time.Now())
			}
			a.beat(r, time.Now())
		case <-look.C:
			looking = false
			a.look(r, time.Now())
		case <-a.reached:
			a.atLimit(r, time.Now())
		case q := <-a.questions:
			a.answer(r, q)
		case m := <-a.orders:
			m.answer <- a.mark(r, m.order)
		case <-ctx.Done():
			return a.last(r)
		}
	}
}

// tellFuture warns of a history that is ahead of the clock.
func (a *Agent) tellFuture(through int64) {
	at := time.Unix(0, through)
	if ahead := at.Sub(a.o.Now()); ahead > a.site.Timing.Ahead {
		a.o.Log.Error("the history stands in the future of this machine's clock; until the clock has come there, every reading is late. Set the clock, or give another data folder",
			"history", at.UTC(), "ahead", ahead.Round(time.Second))
	}
}

// look commits at once where a broker waits for acknowledgements.
func (a *Agent) look(r *rhythm, system time.Time) {
	commit := false
	for _, f := range r.intakes {
		commit = f.look(a.o.Log) || commit
	}
	if commit {
		a.take(r)
		a.commit(r, system, false)
	}
	for _, f := range r.intakes {
		if r.books.fault != "" && f.hold.over(system, f.window.stuck(), f.rate.perSecond, f.queue) {
			a.goOn(r, f)
		}
	}
}

// atLimit commits at once where a broker has sent all that it sends without an
// acknowledgement.
func (a *Agent) atLimit(r *rhythm, system time.Time) {
	commit := false
	for _, f := range r.intakes {
		switch {
		case f.hold.inMemory:
			a.goOn(r, f)
		case f.window.reached(f.session.Waiting()):
			commit = true
		}
	}
	if commit {
		a.put(r)
		a.commit(r, system, false)
	}
	for _, f := range r.intakes {
		f.session.TellAt(f.window.limit)
	}
}

// goOn acknowledges what is in memory only: the disk takes nothing, the broker has
// stopped sending, and its own queue would be full before long. What the accounts hold
// goes into the next checkpoint; a crash before it loses what came since the last
// commit.
func (a *Agent) goOn(r *rhythm, f *intake) {
	if !f.hold.inMemory {
		a.o.Log.Warn("the disk takes nothing, and the broker has stopped sending and must be taken to drop readings before long: going on in memory; a crash now would lose what has come since the last commit", f.label()...)
	}
	a.put(r)
	f.hold.inMemory, r.books.forced = true, true
	f.acknowledge()
	f.window.failed()
}

// beat takes what came, computes, commits when due, and publishes.
func (a *Agent) beat(r *rhythm, system time.Time) {
	a.take(r)
	r.books.lapsedShelves()
	if a.due(r, system) {
		a.commit(r, system, false)
	}
	if system.Sub(r.trimmed) >= trimEvery {
		r.trimmed = system
		if err := r.books.trim(r.pace.through); err != nil {
			a.o.Log.Error("history is not trimmed", "error", err)
		}
	}
	a.publish(r)
	a.tell(system, false)
	a.watch.look(a.latest.Load(), a.o.Now())
	a.health.tick(system)
	notify("WATCHDOG=1")
}

// last ends the work: what has come is committed with a checkpoint and
// acknowledged.
func (a *Agent) last(r *rhythm) error {
	a.take(r)
	r.books.happened(eventStopped, "heatreeve "+a.o.Version+" stopped with all committed")
	if !a.commit(r, time.Now(), true) {
		return fmt.Errorf("last commit: %s", r.books.fault)
	}
	a.publish(r)
	a.tell(time.Now(), true)
	if r.pace.through <= 0 {
		a.o.Log.Info("heatreeve has stopped; event time had not begun")
		return nil
	}
	a.o.Log.Info("heatreeve has stopped", "event_time", time.Unix(0, r.pace.through).UTC())
	return nil
}

// take looks at the sessions and puts what came through the accounts.
func (a *Agent) take(r *rhythm) {
	for _, f := range r.intakes {
		f.take()
	}
	a.put(r)
}

// put puts what came through the accounts, in pieces, so that event time keeps up
// with a backlog and no more than the lateness of it ever waits.
func (a *Agent) put(r *rhythm) {
	now := a.o.Now()
	a.followClock(r)
	for i, f := range r.intakes {
		f.received = f.session.Take(emptied(f.received))
		r.standings[i] = f.standing(r.books.fault != "")
	}
	silent := true
	for _, f := range r.intakes {
		for piece := range slices.Chunk(f.received, pieceReadings) {
			r.account(f, piece, now)
			silent = false
		}
	}
	if silent {
		r.account(nil, nil, now)
	}
}

// followClock takes over what the clock was set by.
func (a *Agent) followClock(r *rhythm) {
	if a.clock == nil {
		return
	}
	_, shifted := a.clock.state()
	r.pace.shift(shifted - r.shifted)
	if by := shifted - r.shifted; by != 0 {
		r.books.happened(eventClock, fmt.Sprintf("the clock of this machine was set by %v, and its new setting is followed", by.Round(time.Millisecond)))
	}
	r.shifted = shifted
}

// emptied returns s to be filled again. It holds nothing any more, nor, unless it was
// filled to a quarter, room for thousands that a burst once took.
func emptied[T any](s []T) []T {
	if cap(s) > 4*max(len(s), pieceReadings) {
		return nil
	}
	clear(s)
	return s[:0]
}

// account puts a piece through the accounts, once they have room for it.
func (r *rhythm) account(f *intake, piece []ingest.Received, now time.Time) {
	if at := r.books.accounts.engine.Relief(len(piece)); at > r.pace.through {
		r.books.beat(nil, r.pace.press(at, now))
	}
	r.note(f, piece, now)
	r.books.beat(r.readings, r.pace.advance(now, r.standings...))
}

// note tells the pace of what came, and keeps what is to be acknowledged.
func (r *rhythm) note(f *intake, piece []ingest.Received, now time.Time) {
	r.readings = r.readings[:0]
	for _, x := range piece {
		reading := x.Reading
		reading.Tag = f.tags[x.Tag]
		r.readings = append(r.readings, reading)
		if !x.Retained {
			r.pace.reading(reading.Tag, x.At, x.Stamped, x.InOrder, now)
		}
		if x.Acknowledgeable() {
			f.unacked = append(f.unacked, x)
		}
	}
}

// due tells whether to commit; a disk that takes nothing is tried in its own rhythm.
func (a *Agent) due(r *rhythm, system time.Time) bool {
	since := system.Sub(r.committed)
	if r.books.fault != "" {
		return since >= min(a.site.Timing.Commit, tryAgain)
	}
	return since >= a.site.Timing.Commit || r.books.waiting >= eagerReadings
}

// commit writes to disk and only then acknowledges to the broker.
func (a *Agent) commit(r *rhythm, system time.Time, checkpoint bool) bool {
	r.committed = system
	begun := time.Now()
	err := r.books.commit(system, checkpoint)
	if store.IsFull(err) && r.books.makeRoom(r.pace.through) {
		err = r.books.commit(system, checkpoint)
	}
	a.commits.Observe(time.Since(begun).Seconds())
	if err != nil {
		for _, f := range r.intakes {
			f.window.failed()
		}
		return false
	}
	if slices.ContainsFunc(r.intakes, func(f *intake) bool { return f.hold.inMemory }) {
		a.o.Log.Info("the history is written again")
	}
	for _, f := range r.intakes {
		f.committed(system)
	}
	return true
}
