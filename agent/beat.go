package agent

import (
	"context"
	"fmt"
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
	received  []ingest.Received // taken in this beat
	unacked   []ingest.Received // taken and not yet on disk
	readings  []ingest.Reading
	stats     ingest.Stats
	shifted   time.Duration // of the clock, as the pace knows
	committed time.Time     // system clock
	trimmed   time.Time
	window    window
	told      bool   // that the broker waits
	hold      hold   // while the disk takes nothing
	rate      rate   // of messages, while it does
	late      []bool // tags whose first late reading has been told
}

// beats moves the accounts forward until ctx ends, then commits what is left.
func (a *Agent) beats(ctx context.Context, books *ledger) error {
	notify("READY=1")
	defer notify("STOPPING=1")
	now := time.Now()
	r := &rhythm{
		pace:  newPace(len(a.site.Tags), a.site.Timing.Lateness, a.site.Timing.Commit, hasStamps(a.site)),
		books: books, committed: now, trimmed: now, late: make([]bool, len(a.site.Tags)),
	}
	s := books.accounts.engine.Snapshot()
	r.pace.through = s.Through
	for i, t := range s.Tags {
		if a.site.Tags[i].Time != "" {
			r.pace.last[i] = t.Newest
		}
	}
	a.tellFuture(r.pace.through)
	a.endMetrics(r, s)
	ticker, look := time.NewTicker(a.site.Timing.Beat), time.NewTimer(lookEvery)
	defer ticker.Stop()
	defer look.Stop()
	a.beat(r, time.Now())
	for looking := true; ; {
		if !looking && (r.window.wakeful() || r.books.fault != "") {
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
		case <-a.session.Reached():
			a.reached(r, time.Now())
		case q := <-a.questions:
			a.answer(r, q)
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

// look commits at once where the broker waits for acknowledgements.
func (a *Agent) look(r *rhythm, system time.Time) {
	commit := r.window.look(a.session.Waiting())
	a.session.TellAt(r.window.limit)
	if r.window.proven && !r.told {
		r.told = true
		a.o.Log.Info("the broker seems to wait for acknowledgements; the history is written more often than timing.commit while it does. To spare the disk, raise the broker's limit of messages in flight", "messages", r.window.acked)
	}
	if commit {
		a.take(r)
		a.commit(r, system, false)
	}
	if r.books.fault != "" && r.hold.over(system, r.window.stuck(), r.rate.perSecond) {
		a.goOn(r)
	}
}

// reached commits at once where the broker has sent all that it sends without an
// acknowledgement.
func (a *Agent) reached(r *rhythm, system time.Time) {
	waiting := a.session.Waiting()
	switch {
	case r.hold.inMemory:
		a.goOn(r)
	case r.window.reached(waiting):
		a.put(r)
		a.commit(r, system, false)
	}
	a.session.TellAt(r.window.limit)
}

// goOn acknowledges what is in memory only: the disk takes nothing, the broker has
// stopped sending, and its own queue would be full before long. What the accounts hold
// goes into the next checkpoint; a crash before it loses what came since the last
// commit.
func (a *Agent) goOn(r *rhythm) {
	if !r.hold.inMemory {
		a.o.Log.Warn("the disk takes nothing, and the broker has stopped sending and must be taken to drop readings before long: going on in memory; a crash now would lose what has come since the last commit")
	}
	a.put(r)
	r.hold.inMemory, r.books.forced = true, true
	a.session.Ack(r.unacked)
	r.unacked = emptied(r.unacked)
	r.window.failed()
}

// beat takes what came, computes, commits when due, and publishes.
func (a *Agent) beat(r *rhythm, system time.Time) {
	a.take(r)
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
	if r.pace.through <= 0 {
		a.o.Log.Info("heatreeve has stopped; event time had not begun")
		return nil
	}
	a.o.Log.Info("heatreeve has stopped", "event_time", time.Unix(0, r.pace.through).UTC())
	return nil
}

// take looks at the session and puts what came through the accounts.
func (a *Agent) take(r *rhythm) {
	before := r.stats.Connections
	r.stats = a.session.Stats()
	if r.stats.Connections != before {
		r.window.connected()
	}
	a.put(r)
}

// put puts what came through the accounts, in pieces, so that event time keeps up
// with a backlog and no more than the lateness of it ever waits.
func (a *Agent) put(r *rhythm) {
	now := a.o.Now()
	if a.clock != nil {
		_, shifted := a.clock.state()
		r.pace.shift(shifted - r.shifted)
		if by := shifted - r.shifted; by != 0 {
			r.books.happened(eventClock, fmt.Sprintf("the clock of this machine was set by %v, and its new setting is followed", by.Round(time.Millisecond)))
		}
		r.shifted = shifted
	}
	r.received = a.session.Take(emptied(r.received))
	heldBack := a.session.Waiting() >= leastWindow && (r.window.eager || r.books.fault != "")
	for rest := r.received; ; {
		piece := rest[:min(len(rest), pieceReadings)]
		rest = rest[len(piece):]
		r.account(piece, now, heldBack)
		if len(rest) == 0 {
			return
		}
	}
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
func (r *rhythm) account(piece []ingest.Received, now time.Time, heldBack bool) {
	if at := r.books.accounts.engine.Relief(len(piece)); at > r.pace.through {
		r.books.beat(nil, r.pace.press(at, now))
	}
	r.note(piece, now)
	r.books.beat(r.readings, r.pace.advance(now, r.stats.Connected, heldBack))
}

// note tells the pace of what came, and keeps what is to be acknowledged.
func (r *rhythm) note(piece []ingest.Received, now time.Time) {
	r.readings = r.readings[:0]
	for _, x := range piece {
		r.readings = append(r.readings, x.Reading)
		if !x.Retained {
			r.pace.reading(x.Tag, x.At, x.Stamped, x.InOrder, now)
		}
		if x.Acknowledgeable() {
			r.unacked = append(r.unacked, x)
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
		r.window.failed()
		return false
	}
	if r.hold.inMemory {
		a.o.Log.Info("the history is written again")
	}
	r.hold = hold{}
	waiting := a.session.Waiting()
	a.session.Ack(r.unacked)
	r.rate.note(max(0, waiting-a.session.Waiting()), system)
	r.window.committed(waiting)
	r.unacked = emptied(r.unacked)
	return true
}
