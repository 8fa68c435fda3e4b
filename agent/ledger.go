package agent

import (
	"fmt"
	"log/slog"
	"math"
	"sync/atomic"
	"time"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/agent/warn"
	"heatreeve/ingest"
	"heatreeve/ingest/quality"
	"heatreeve/store"
)

const (
	// checkpointEvery bounds what a restart has to put through again.
	checkpointEvery = 10 * time.Minute
	// recallSpan is how far back repeats from the broker are recognised after a
	// restart.
	recallSpan = 10 * time.Minute
	// maxUncommitted bounds the readings that wait in memory for a disk that
	// takes nothing; beyond it the oldest are given up and counted.
	maxUncommitted = 200_000
	// maxMinutes bounds the minute records that wait likewise.
	maxMinutes = 100_000
	// mostAging is how much older one trim takes the history to be than the one before.
	mostAging = 7 * 24 * time.Hour
)

// ledger keeps the accounts and the history of them together: what the accounts
// took in since the last commit waits here until it is on disk.
type ledger struct {
	accounts    *accounts
	store       *store.Store
	write       func(store.Batch) error // Commit of store
	log         *slog.Logger
	tagIDs      []uint32
	loadIDs     []uint32
	batch       store.Batch
	waiting     int   // readings in batch
	booked      int64 // event time of committed
	aged        int64 // event time by which the history was last trimmed; 0: none yet
	committed   []loads.Totals
	through     atomic.Int64 // event time as last committed; for any goroutine
	saved       time.Time    // of the last checkpoint
	forced      bool         // the next commit must carry a checkpoint: the beats alone would not lead to the accounts
	lost        uint64       // readings given up
	lostMinutes uint64
	failures    uint64
	fault       string
	diary       diary
	attested    *attested
	board       warn.Board // the warnings as they are shown
}

// openLedger takes up the accounts where the history left them; now is by the system's
// clock. Of o it wants the log, the version and the clock; without that, now stands still.
func openLedger(s *site.Site, db *store.Store, o Options, now time.Time) (*ledger, error) {
	a, err := newAccounts(plantOf(s), designOf(s), s.Digest, s.Zone)
	if err != nil {
		return nil, err
	}
	a.site, a.zone, a.units = s.Name, s.Zone.String(), unitsOf(s)
	l := &ledger{accounts: a, store: db, write: db.Commit, log: o.Log, saved: now}
	clock := o.Now
	if clock == nil {
		clock = func() time.Time { return now }
	}
	if l.diary, err = newDiary(db, clock); err != nil {
		return nil, err
	}
	if l.tagIDs, err = l.number("tag", names(s.Tags, func(t site.Tag) string { return t.Name })); err != nil {
		return nil, err
	}
	if l.loadIDs, err = l.number("load", names(s.Loads, func(t site.HeatLoad) string { return t.Name })); err != nil {
		return nil, err
	}
	if err := l.resume(); err != nil {
		return nil, fmt.Errorf("resume the accounts: %w", err)
	}
	l.committed, l.aged = l.registers(), l.accounts.engine.Through()
	if l.attested, err = newAttested(a.cfg.Loads, s.Zone, db, l.loadIDs, l.aged); err != nil {
		return nil, fmt.Errorf("take up the witnesses: %w", err)
	}
	l.warned()
	a.roll.Forget(a.watched)
	l.board = a.roll.Board(a.watched)
	l.batch.Site = &store.SiteFile{From: l.accounts.engine.Through(), Text: s.Text}
	l.happened(eventStarted, fmt.Sprintf("heatreeve %s, site file %s", o.Version, shortDigest(s.Digest)))
	if err := l.first(now); err != nil {
		return nil, err
	}
	return l, nil
}

// number returns the numbers of names in the history. A full one makes room for those
// that are new.
func (l *ledger) number(kind string, names []string) ([]uint32, error) {
	for {
		ids, err := l.store.IDs(kind, names)
		if !store.IsFull(err) || !l.makeRoom(0) { // nothing is too old at the epoch
			return ids, err
		}
	}
}

// first commits the run's own checkpoint. On a full disk it makes room as long as
// there is any to make; where there is none, the agent starts all the same, and says
// that its history is not written.
func (l *ledger) first(now time.Time) error {
	l.forced = true
	for {
		err := l.commit(now, true)
		if err == nil || !store.IsFull(err) {
			return err
		}
		if !l.makeRoom(l.accounts.engine.Snapshot().Through) {
			return nil
		}
	}
}

// makeRoom gives up the oldest records of a full history, and reports whether there
// were any to give up.
func (l *ledger) makeRoom(now int64) bool {
	t, err := l.store.Trim(l.age(now))
	if err != nil {
		l.log.Error("history is not trimmed", "error", err)
		return false
	}
	if t == (store.Trimmed{}) {
		return false
	}
	l.log.Warn("the history is full: the oldest records make room", "readings", t.Readings, "minutes", t.Minutes, "hours", t.Hours, "events", t.Events, "site_files", t.Sites, "damaged", t.Damaged)
	return true
}

func names[T any](all []T, name func(T) string) []string {
	out := make([]string, len(all))
	for i, x := range all {
		out[i] = name(x)
	}
	return out
}

func unitsOf(s *site.Site) map[string]string {
	units := make(map[string]string, len(s.Tags))
	for _, t := range s.Tags {
		units[t.Name] = t.Unit.Dimension.SI()
	}
	return units
}

// resume restores the last checkpoint and puts the beats since through again. A
// load that the checkpoint does not know, because the site file left it out for a
// while, goes on from its registers. Where the site file or the program has changed
// since, the beats are not computed again by rules that were not theirs: the
// registers stand as they were last committed, and the readings are only held. What waited
// for a decision then is missing.
func (l *ledger) resume() error {
	known, err := l.totals()
	if err != nil {
		return err
	}
	state, ok, err := l.store.Checkpoint()
	if err != nil {
		return err
	}
	l.take(known)
	if !ok { // as a salvaged history may be: there is nothing but registers and the beats
		if err := l.closeWarnings(); err != nil {
			return err
		}
		if len(known) > 0 {
			const text = "the history has no state of the accounts: they go on from the registers as last committed, and the time since then is missing"
			l.log.Warn(text)
			defer l.happened(eventState, text)
		}
		return l.replay(true)
	}
	same, err := l.accounts.restore(state)
	if err != nil {
		return err
	}
	if same {
		return l.replay(true)
	}
	l.log.Info("the site file or the rules of booking have changed: the accounts go on by the new ones, from the registers as last committed")
	begun := l.accounts.begun()
	l.take(known)
	if err := l.replay(false); err != nil {
		return err
	}
	l.accounts.lapse(begun)
	l.happened(eventRules, rulesChanged(l.accounts.fileBefore, l.accounts.file))
	return nil
}

// take gives the loads the registers that the history holds for them.
func (l *ledger) take(known map[int]store.Register) {
	for i, r := range known {
		l.accounts.engine.SetRegisters(i, loads.Totals{
			Given: r.Given, Taken: r.Taken, BridgedGiven: r.BridgedGiven, BridgedTaken: r.BridgedTaken,
			Measured: nanoseconds(r.Measured), Bridged: nanoseconds(r.Bridged), Missing: nanoseconds(r.Missing),
			Uncertain: nanoseconds(r.Uncertain),
		})
	}
}

// replay brings the accounts from the checkpoint to the last commit.
func (l *ledger) replay(compute bool) error {
	index := l.tagIndex()
	for b, err := range l.store.Before(recallSpan) {
		if err != nil {
			return err
		}
		l.accounts.engine.Recall(readingsOf(b, index))
	}
	for b, err := range l.store.Since() {
		if err != nil {
			return err
		}
		beat := loads.Beat{Readings: readingsOf(b, index), Through: b.Through}
		if compute {
			l.accounts.advance(beat)
		} else {
			l.accounts.engine.Adopt(beat)
		}
	}
	l.accounts.engine.ClearTally()
	return nil
}

// totals returns the registers that the history holds for today's loads, by
// their index.
func (l *ledger) totals() (map[int]store.Register, error) {
	all, err := l.store.Registers()
	if err != nil {
		return nil, err
	}
	known := make(map[int]store.Register)
	for _, r := range all {
		for i, id := range l.loadIDs {
			if id == r.Load {
				known[i] = r
			}
		}
	}
	return known, nil
}

// tagIndex finds the tags by their number in the history, but for those whose readings mean
// something else now.
func (l *ledger) tagIndex() map[uint32]int {
	index := make(map[uint32]int, len(l.tagIDs))
	for i, id := range l.tagIDs {
		if !l.accounts.engine.Renewed(i) {
			index[id] = i
		}
	}
	return index
}

// readingsOf translates a stored beat; readings of tags that the site no longer
// has are passed over.
func readingsOf(b store.Beat, index map[uint32]int) []loads.Reading {
	out := make([]loads.Reading, 0, len(b.Readings))
	for _, r := range b.Readings {
		if i, ok := index[r.Tag]; ok {
			out = append(out, loads.Reading{Tag: i, At: r.At, Value: r.Value, Mark: quality.Mark(r.Mark)})
		}
	}
	return out
}

// beat puts what came in through the accounts and keeps it for the next commit.
func (l *ledger) beat(received []ingest.Reading, through int64) {
	kept := store.Beat{Through: through, Readings: make([]store.Reading, len(received))}
	beat := loads.Beat{Through: through, Readings: make([]loads.Reading, len(received))}
	for i, r := range received {
		kept.Readings[i] = store.Reading{Tag: l.tagIDs[r.Tag], At: r.At, Value: r.Value, Stamped: r.Stamped, Mark: uint8(r.Mark)}
		beat.Readings[i] = readingOf(r)
	}
	closed := l.accounts.advance(beat)
	for i, m := range closed {
		l.batch.Minutes = append(l.batch.Minutes, l.minute(m, l.accounts.expected[i]))
		l.attested.add(m.Load, m.Start, m.Witness, m.Compared)
	}
	if len(closed) > 0 {
		l.warned()
	}
	l.batch.Beats = append(l.batch.Beats, kept)
	l.waiting += len(received)
	l.bound()
}

// readingOf is a reading as the engine takes it.
func readingOf(r ingest.Reading) loads.Reading {
	return loads.Reading{Tag: r.Tag, At: r.At, Value: r.Value, Mark: r.Mark}
}

func (l *ledger) minute(m loads.Minute, e expectation) store.Minute {
	kept := store.Minute{
		Load: l.loadIDs[m.Load], Start: m.Start,
		Measured: seconds(m.Measured), Bridged: seconds(m.Bridged), Missing: seconds(m.Missing),
		Given: m.Given, Taken: m.Taken, BridgedGiven: m.BridgedGiven, BridgedTaken: m.BridgedTaken,
		Latent: seconds(m.Latent), Uncertain: seconds(m.Uncertain),
		Duty: m.Duty, DutyMin: m.DutyMin, DutyMax: m.DutyMax, DutyUncertainty: m.Uncertainty,
		Flow: m.MassFlow, Inlet: m.Inlet, Outlet: m.Outlet, Pressure: m.Pressure, Content: m.Content,
		Random: m.Random, Witness: m.Witness, Compared: m.Compared,
		Expected: e.duty, ExpectedError: e.lasting,
	}
	copy(kept.Systematic[:], m.Systematic[:])
	return kept
}

func seconds(ns int64) float64 { return float64(ns) / 1e9 }

// nanoseconds goes back from seconds, to the millisecond: beyond that a float64 of
// many years holds no digits.
func nanoseconds(s float64) int64 { return int64(math.Round(s*1e3)) * 1e6 }

// bound gives up the oldest readings when the disk has taken nothing for long.
// The accounts have them; a checkpoint carries those on.
func (l *ledger) bound() {
	for l.waiting > maxUncommitted || len(l.batch.Beats) > maxUncommitted {
		n := len(l.batch.Beats[0].Readings)
		l.waiting -= n
		l.lost += uint64(n)
		l.batch.Beats = l.batch.Beats[1:]
		l.forced = true
		l.outageFrom("")
	}
	if n := len(l.batch.Minutes) - maxMinutes; n > 0 {
		l.lostMinutes += uint64(n)
		l.outageFrom("")
		l.batch.Minutes = l.batch.Minutes[n:]
	}
}

// commit writes what waits, with the registers, and with a checkpoint when one is
// due or asked for. After an error everything waits on. Registers that cannot have
// changed are not written again: a broker with a small limit of messages in flight
// may want hundreds of commits a second.
func (l *ledger) commit(now time.Time, checkpoint bool) error {
	through := l.accounts.engine.Through()
	checkpoint = checkpoint || l.forced || now.Sub(l.saved) >= checkpointEvery
	registers := l.committed
	l.batch.Registers, l.batch.Checkpoint = l.batch.Registers[:0], nil
	if through != l.booked || checkpoint {
		registers = l.registers()
		l.writeRegisters(registers)
	}
	if checkpoint {
		state, err := l.accounts.save()
		if err != nil {
			return err
		}
		l.batch.Checkpoint = state
	}
	l.batch.Events = l.events()
	if err := l.write(l.batch); err != nil {
		l.fail(err)
		return err
	}
	if checkpoint {
		l.saved, l.forced = now, false
	}
	l.committed, l.booked, l.fault, l.waiting = registers, through, "", 0
	l.through.Store(through)
	l.told()
	l.batch.Beats, l.batch.Minutes, l.batch.Site = emptied(l.batch.Beats), emptied(l.batch.Minutes), nil
	return nil
}

func (l *ledger) writeRegisters(registers []loads.Totals) {
	for i, r := range registers {
		l.batch.Registers = append(l.batch.Registers, store.Register{
			Load: l.loadIDs[i], Given: r.Given, Taken: r.Taken, BridgedGiven: r.BridgedGiven, BridgedTaken: r.BridgedTaken,
			Measured: seconds(r.Measured), Bridged: seconds(r.Bridged), Missing: seconds(r.Missing),
			Uncertain: seconds(r.Uncertain),
		})
	}
}

// fail counts a failed commit and logs the first of a row.
func (l *ledger) fail(err error) {
	l.failures++
	if l.fault == "" {
		l.log.Error("history is not written; the agent goes on and tries again", "error", err)
	}
	l.fault = err.Error()
	l.outageFrom(l.fault)
}

// age is the event time by which the history is trimmed. It follows a leap slowly: one of
// years is that of a clock that was set wrong, and must not cost all that is older.
func (l *ledger) age(now int64) int64 {
	if l.aged > 0 {
		now = min(now, l.aged+int64(mostAging))
	}
	l.aged = now
	return now
}

// trim keeps the history within its bounds.
func (l *ledger) trim(now int64) error {
	t, err := l.store.Trim(l.age(now))
	if err != nil {
		return err
	}
	if t != (store.Trimmed{}) {
		l.log.Info("history trimmed", "readings", t.Readings, "minutes", t.Minutes, "hours", t.Hours, "events", t.Events, "site_files", t.Sites, "damaged", t.Damaged, "bytes", l.store.Bytes())
	}
	return nil
}

// registers are the totals of the accounts as they stand.
func (l *ledger) registers() []loads.Totals {
	s := l.accounts.engine.Snapshot()
	out := make([]loads.Totals, len(s.Loads))
	for i := range s.Loads {
		out[i] = s.Loads[i].Totals
	}
	return out
}
