package agent

import (
	"bytes"
	"encoding/gob"
	"fmt"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/warn"
)

// accounts are the engine and the judges of one plant, moved forward together a
// beat at a time by one goroutine.
type accounts struct {
	cfg        loads.Config
	rules      [32]byte
	file       [32]byte   // digest of the site file
	byLoad     [][32]byte // see rulesOfLoad
	fileBefore [32]byte   // of the restored state; zero where it is not known
	kept       []bool     // loads that the restored state had accounts of
	engine     *loads.Engine
	verdicts   *design.Plant
	place      *time.Location // whose clock tells the hour of the week
	closed     []loads.Minute
	expected   []expectation // of each minute of closed
	roll       warn.Roll     // of the warnings
	watched    []warn.Watched

	site, zone string            // name of the plant, and time zone of its reports
	units      map[string]string // SI unit of the readings of each tag, or changedUnit
}

// newAccounts returns empty accounts of the plant that the site file with the digest
// site describes, at a place.
func newAccounts(cfg loads.Config, designs design.Config, site [32]byte, place *time.Location) (*accounts, error) {
	engine, err := loads.New(cfg)
	if err != nil {
		return nil, err
	}
	a := &accounts{cfg: cfg, rules: rulesOf(site, &cfg), file: site, engine: engine, verdicts: design.NewPlant(designs), place: place, watched: watchedOf(designs)}
	for i := range cfg.Loads {
		a.byLoad = append(a.byLoad, rulesOfLoad(&cfg, i))
	}
	return a, nil
}

// mostGap is the longest time that is booked as missing at one time. More is no outage
// but a clock that was set by years: of that the last firstReach is booked, as where
// accounts begin.
const mostGap = 366 * 24 * time.Hour

// expectation is the duty that was expected of a minute, W, and its standard uncertainty by
// what lasts; both are 0 where nothing was.
type expectation struct{ duty, lasting float64 }

// advance puts one beat through and returns the minutes that closed; they are
// good until the next call, and so is what was expected of them. By an exchanger something is
// expected once both of its sides have closed: of a minute whose other side closes in a later
// beat, nothing is, whenever the history is written.
func (a *accounts) advance(b loads.Beat) []loads.Minute {
	if from := a.engine.Through(); from > 0 && b.Through-from > int64(mostGap) {
		a.engine.Adopt(loads.Beat{Through: b.Through - int64(firstReach)})
	}
	a.closed = a.engine.Advance(b, a.closed[:0])
	a.expected = append(a.expected[:0], make([]expectation, len(a.closed))...)
	for i := range a.closed {
		m := &a.closed[i]
		for _, t := range a.verdicts.Observe(m.Load, minuteOf(m), a.hour(m.Start)) {
			a.expect(i, t)
		}
	}
	return a.closed
}

// expect keeps what was told of one of the minutes of closed, of which i was the last that the
// judges have seen.
func (a *accounts) expect(i int, t design.Told) {
	for ; i >= 0; i-- {
		if m := &a.closed[i]; m.Load == t.Load && m.Start == t.Start {
			a.expected[i] = expectation{t.Duty, t.Lasting}
			return
		}
	}
}

// hour is that of the week in which an instant lies, 0 from Monday midnight.
func (a *accounts) hour(at int64) int {
	t := time.Unix(0, at).In(a.place)
	return (int(t.Weekday())+6)%7*24 + t.Hour()
}

// savedAccounts is the state of engine and verdicts.
type savedAccounts struct {
	Rules  [32]byte            // that the accounts were kept by; see rulesOf
	File   [32]byte            // digest of the site file
	Loads  map[string][32]byte // those of each load; see rulesOfLoad
	Engine []byte
	Design design.Saved
	// Roll has the warnings with the marks of operators, Watched what there can be.
	Roll    warn.Roll
	Watched []warn.Watched
	// Judges is what there was of verdicts before; its names are all that is read.
	Judges map[string]olderJudge

	Site, Zone string            // name of the plant, and time zone of its reports
	Units      map[string]string // SI unit of the readings of each tag, also of former ones
}

type olderJudge struct{ Last design.Verdict }

// knows tells whether there are accounts of a load.
func (s *savedAccounts) knows(load string) bool {
	_, ok := s.Loads[load]
	_, older := s.Judges[load]
	return ok || older
}

// save returns the state that restore goes on from.
func (a *accounts) save() ([]byte, error) {
	engine, err := a.engine.Save()
	if err != nil {
		return nil, err
	}
	s := savedAccounts{Rules: a.rules, File: a.file, Engine: engine, Design: a.verdicts.Save(), Roll: a.roll, Watched: a.watched, Loads: make(map[string][32]byte, len(a.cfg.Loads))}
	for i := range a.cfg.Loads {
		s.Loads[a.cfg.Loads[i].Name] = a.byLoad[i]
	}
	s.Site, s.Zone, s.Units = a.site, a.zone, a.units
	var buf bytes.Buffer
	if err := gob.NewEncoder(&buf).Encode(s); err != nil {
		return nil, fmt.Errorf("save verdicts: %w", err)
	}
	return buf.Bytes(), nil
}

// restore takes up what save wrote, and reports whether it was by the same rules. What a
// load waited for that is accounted for otherwise now is missing.
func (a *accounts) restore(state []byte) (same bool, err error) {
	var s savedAccounts
	if err := gob.NewDecoder(bytes.NewReader(state)).Decode(&s); err != nil {
		return false, fmt.Errorf("restore state of %d bytes: %w", len(state), err)
	}
	a.kept = make([]bool, len(a.cfg.Loads))
	for i := range a.cfg.Loads {
		a.kept[i] = s.knows(a.cfg.Loads[i].Name)
	}
	a.verdicts.Restore(s.Design)
	a.roll = s.Roll
	a.fileBefore = s.File
	a.keepUnits(s.Units)
	if err := a.engine.Restore(s.Engine); err != nil {
		return false, err
	}
	for i, now := range a.byLoad {
		if was, ok := s.Loads[a.cfg.Loads[i].Name]; ok && was != now {
			a.engine.Drop(i)
		}
	}
	return s.Rules == a.rules, nil
}

// begun returns since when each load's time adds up: its undecided time and that in its
// registers lead from there to where event time has come.
func (a *accounts) begun() []int64 {
	s := a.engine.Snapshot()
	from := make([]int64, len(s.Loads))
	for i, l := range s.Loads {
		from[i] = s.Through - l.Undecided - l.Measured - l.Bridged - l.Missing
	}
	return from
}

// lapse adds to the missing time of the loads that were restored what their registers lack
// since begun: it waited for what no one can decide any more.
func (a *accounts) lapse(begun []int64) {
	now := a.begun()
	for i, l := range a.engine.Snapshot().Loads {
		lost := now[i] - begun[i]
		if a.kept[i] && lost > 0 && lost < int64(mostGap) {
			l.Missing += lost
			a.engine.SetRegisters(i, l.Totals)
		}
	}
}

// changedUnit stands for the unit of a tag whose readings were not always of one.
const changedUnit = "changed"

// keepUnits adds the units that the history had before: of tags that have left, and of those
// that measure something else now.
func (a *accounts) keepUnits(before map[string]string) {
	if a.units == nil {
		return
	}
	for tag, was := range before {
		if is, ok := a.units[tag]; !ok {
			a.units[tag] = was
		} else if is != was {
			a.units[tag] = changedUnit
		}
	}
}
