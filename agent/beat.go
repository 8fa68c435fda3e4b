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
	committed time.Time // system clock
	trimmed   time.Time
	window    window
	told      bool   // that the broker waits
	inMemory  bool   // messages were acknowledged that are not on disk
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
	ticker, look := time.NewTicker(a.site.Timing.Beat), time.NewTicker(lookEvery)
	defer ticker.Stop()
	defer look.Stop()
	a.beat(r, time.Now())
	for {
		select {
		case <-ticker.C:
			a.beat(r, time.Now())
		case <-look.C:
			a.look(r, time.Now())
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
	if r.window.proven && !r.told {
		r.told = true
		a.o.Log.Info("the broker seems to wait for acknowledgements; the history is written more often than timing.commit while it does. To spare the disk, raise the broker's limit of messages in flight", "messages", r.window.acked)
	}
	if commit {
		a.take(r)
		a.commit(r, system, false)
	}
	if r.books.fault != "" && r.window.stuck() && len(r.unacked) > 0 {
		a.goOn(r)
	}
}

// goOn acknowledges what is in memory only: the disk takes nothing, so the broker
// has stopped sending, and the loads would go blind. What the accounts hold goes
// into the next checkpoint; a crash before it loses it.
func (a *Agent) goOn(r *rhythm) {
	if !r.inMemory {
		a.o.Log.Warn("the disk takes nothing and the broker waits: going on in memory; a crash now would lose what has come since the last commit")
	}
	r.inMemory, r.books.forced = true, true
	a.session.Ack(r.unacked)
	r.unacked = r.unacked[:0]
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
	if !a.commit(r, time.Now(), true) {
		return fmt.Errorf("last commit: %s", r.books.fault)
	}
	a.o.Log.Info("heatreeve has stopped", "event_time", time.Unix(0, r.pace.through).UTC())
	return nil
}

// take puts what came through the accounts, in pieces, so that event time keeps up
// with a backlog and no more than the lateness of it ever waits.
func (a *Agent) take(r *rhythm) {
	now := a.o.Now()
	r.received = a.session.Take(r.received[:0])
	before := r.stats.Connections
	r.stats = a.session.Stats()
	if r.stats.Connections != before {
		r.window.connected()
	}
	heldBack := a.session.Waiting() >= leastWindow && (r.window.eager || r.books.fault != "")
	for rest := r.received; ; {
		piece := rest[:min(len(rest), pieceReadings)]
		rest = rest[len(piece):]
		a.note(r, piece, now)
		r.books.beat(r.readings, r.pace.advance(now, r.stats.Connected, heldBack))
		if len(rest) == 0 {
			return
		}
	}
}

// note tells the pace of what came, and keeps what is to be acknowledged.
func (a *Agent) note(r *rhythm, piece []ingest.Received, now time.Time) {
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

func (a *Agent) due(r *rhythm, system time.Time) bool {
	return system.Sub(r.committed) >= a.site.Timing.Commit || r.books.waiting >= eagerReadings
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
	if r.inMemory {
		a.o.Log.Info("the history is written again")
	}
	r.inMemory = false
	r.window.committed(a.session.Waiting())
	a.session.Ack(r.unacked)
	r.unacked = r.unacked[:0]
	return true
}
