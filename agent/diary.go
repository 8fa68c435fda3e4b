package agent

import (
	"fmt"
	"time"

	"heatreeve/store"
)

// Kinds of what is told beside the accounts.
const (
	eventStarted = "started"
	eventStopped = "stopped"
	eventRules   = "rules"  // the accounts go on by others
	eventState   = "state"  // the accounts go on without theirs
	eventDisk    = "disk"   // it took nothing
	eventLost    = "lost"   // readings, minutes or events were given up
	eventClock   = "clock"  // it was set
	eventDamage  = "damage" // of the history
)

const (
	// mostWaiting bounds the events that wait for a disk that takes nothing. Those beyond
	// it are given up and counted.
	mostWaiting = 1000
	// leastOutage is the least time without a commit that is told: less is a full history
	// that has made room.
	leastOutage = 2 * time.Second
)

// diary holds what happened since the last commit. Each event has its number from the
// beginning, so that a batch that is tried again tells it once.
type diary struct {
	now     func() time.Time
	next    uint64 // number of the next event
	waiting []store.Event
	outage  outage
	dropped uint64 // events given up
	told    losses
	damaged int64 // records of the history that were told
}

// outage is the time since a commit did not succeed.
type outage struct {
	since  int64 // 0: there is none
	number uint64
	cause  string
}

// losses are what was given up altogether.
type losses struct{ readings, minutes, events uint64 }

func newDiary(db *store.Store, now func() time.Time) (d diary, err error) {
	d.now, d.damaged = now, db.Damaged()
	d.next, err = db.NextEvent()
	return d, err
}

// present is when something happens: by the clock that stamps arrivals, but not before the
// time that is accounted for.
func (l *ledger) present() int64 {
	return max(l.diary.now().UnixNano(), l.accounts.engine.Through())
}

// happened notes for the next commit what took no time.
func (l *ledger) happened(kind, text string) {
	d := &l.diary
	if len(d.waiting) >= mostWaiting {
		d.dropped++
		return
	}
	at := l.present()
	d.waiting = append(d.waiting, store.Event{At: at, Until: at, Number: d.next, Kind: kind, Text: text})
	d.next++
}

// outageFrom notes that a commit did not succeed, or that something was given up.
func (l *ledger) outageFrom(cause string) {
	o := &l.diary.outage
	if o.since == 0 {
		o.since, o.number = l.present(), l.diary.next
		l.diary.next += 2 // one for the outage, one for what it cost
	}
	if o.cause == "" {
		o.cause = cause
	}
}

// events returns what the next commit is to tell.
func (l *ledger) events() []store.Event {
	d := &l.diary
	if damaged := l.store.Damaged(); damaged > d.damaged {
		l.happened(eventDamage, fmt.Sprintf("%d damaged records of the history were left out or replaced; the log tells which", damaged-d.damaged))
		d.damaged = damaged
	}
	all := append(l.batch.Events[:0], d.waiting...)
	o, now := d.outage, l.present()
	if o.cause != "" && now-o.since >= int64(leastOutage) {
		all = append(all, store.Event{At: o.since, Until: now, Number: o.number, Kind: eventDisk, Text: "the disk took nothing: " + o.cause})
	}
	if lost := l.losses(); lost != d.told && o.since != 0 {
		all = append(all, store.Event{At: o.since, Until: now, Number: o.number + 1, Kind: eventLost, Text: fmt.Sprintf(
			"given up: %d readings, which the accounts have, %d minutes and %d events", lost.readings-d.told.readings, lost.minutes-d.told.minutes, lost.events-d.told.events)})
	}
	return all
}

func (l *ledger) losses() losses { return losses{l.lost, l.lostMinutes, l.diary.dropped} }

// told notes that the events of a commit are on disk.
func (l *ledger) told() {
	d := &l.diary
	if d.outage.since != 0 {
		d.outage, d.told = outage{}, l.losses()
	}
	d.waiting, l.batch.Events = d.waiting[:0], l.batch.Events[:0]
}

// shortDigest is what people compare of a site file's SHA-256.
func shortDigest(sum [32]byte) string { return fmt.Sprintf("%x", sum[:8]) }

// rulesChanged tells what the accounts go on by, from those of the site file before.
func rulesChanged(before, now [32]byte) string {
	const missing = "; what waited for a decision is missing"
	switch before {
	case [32]byte{}:
		return "the site file or the program's rules of booking changed; site file " + shortDigest(now) + " now" + missing
	case now:
		return "the program's rules of booking changed; site file " + shortDigest(now) + " as before" + missing
	}
	return "the site file changed from " + shortDigest(before) + " to " + shortDigest(now) + missing
}
