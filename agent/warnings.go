package agent

import (
	"fmt"

	"heatreeve/agent/design"
	"heatreeve/agent/warn"
	"heatreeve/store"
)

// Kinds of events of warnings and their marks.
const (
	eventWarning      = "warning" // lasts from its begin to its end
	eventAcknowledged = "acknowledged"
	eventShelved      = "shelved"
	eventUnshelved    = "unshelved"
)

// watchedOf lists the warnings that there can be on a plant: none on a load without a design.
func watchedOf(cfg design.Config) (all []warn.Watched) {
	for i := range cfg.Loads {
		if cfg.Loads[i].Expect == nil && !cfg.Loads[i].ByExchanger {
			continue
		}
		for _, k := range design.Kinds() {
			if !k.OfExchanger() {
				all = append(all, warn.Watched{Subject: cfg.Loads[i].Name, Kind: k})
			}
		}
	}
	for i := range cfg.Exchangers {
		for _, k := range design.Kinds() {
			if k.OfExchanger() {
				all = append(all, warn.Watched{Subject: cfg.Exchangers[i].Name, Kind: k})
			}
		}
	}
	return all
}

// warned takes over what has become of the warnings since it was last called. A commit that
// tells of them carries the checkpoint that holds them, so that the two never differ on disk,
// whenever the process ends.
func (l *ledger) warned() {
	a := l.accounts
	at := l.present()
	told := a.roll.Observe(a.verdicts.Changed(), a.verdicts.Warnings(), at, l.diary.number)
	l.tellWarnings(append(told, a.roll.Advance(at)...), at)
}

// lapsedShelves ends the shelves whose time is over.
func (l *ledger) lapsedShelves() {
	at := l.present()
	l.tellWarnings(l.accounts.roll.Advance(at), at)
}

// tellWarnings tells the history and the log.
func (l *ledger) tellWarnings(told []warn.Change, at int64) {
	for i := range told {
		l.forced = true
		c := &told[i]
		if c.What == warn.RanOut {
			s := &c.Shelf
			l.tellEvent(store.Event{At: at, Until: at, Number: l.diary.number(), Kind: eventUnshelved, Subject: s.Subject, Text: string(s.Kind) + ": its time is over"})
			continue
		}
		l.tellEvent(eventOf(&c.Entry, l.accounts))
		l.logWarning(c)
	}
	l.board = l.accounts.roll.Board(l.accounts.watched)
}

func eventOf(e *warn.Entry, a *accounts) store.Event {
	return store.Event{At: e.Begin, Until: e.End, Number: e.Number, Kind: eventWarning, Subject: e.Subject, Text: e.Text(a.place)}
}

func (l *ledger) logWarning(c *warn.Change) {
	e := &c.Entry
	args := []any{"subject", e.Subject, "kind", string(e.Kind), "greatest", warn.Deviation(e.Kind, e.Greatest)}
	if len(e.Causes) > 0 {
		args = append(args, "first_cause", e.Causes[0].Says)
	}
	switch c.What {
	case warn.Began:
		l.log.Warn("warning", args...)
	case warn.BeganAgain:
		l.log.Warn("warning again, within an hour of its end", append(args, "times", e.Times)...)
	case warn.Over:
		l.log.Info("warning is over", args...)
	}
}

// tellEvent notes an event for the next commit, in the place of what was noted of the same.
func (l *ledger) tellEvent(e store.Event) {
	d := &l.diary
	for i := range d.waiting {
		if d.waiting[i].Number == e.Number {
			d.waiting[i] = e
			return
		}
	}
	if len(d.waiting) >= mostWaiting {
		d.dropped++
		return
	}
	d.waiting = append(d.waiting, e)
}

// number gives a new event its number.
func (d *diary) number() uint64 {
	d.next++
	return d.next - 1
}

// closeWarnings ends the warnings that the history has as lasting, where there is no state
// that knows of them.
func (l *ledger) closeWarnings() error {
	at := l.present()
	for e, err := range l.store.Events(at, at+1) {
		switch {
		case err != nil:
			return fmt.Errorf("warnings of the history: %w", err)
		case e.Kind == eventWarning && e.Until == 0:
			e.Until, e.Text = max(at, e.At), e.Text+"; its end is not known"
			l.tellEvent(e)
		}
	}
	return nil
}
