package agent

import (
	"bytes"
	"encoding/gob"
	"fmt"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
)

// wholeMinute is how much of a minute must be measured and flowing for it to
// count in a verdict.
const wholeMinute = 54 * time.Second

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
	judges     []*design.Judge
	closed     []loads.Minute

	site, zone string            // name of the plant, and time zone of its reports
	units      map[string]string // SI unit of the readings of each tag, or changedUnit
}

// newAccounts returns empty accounts of the plant that the site file with the digest
// site describes.
func newAccounts(cfg loads.Config, targets []design.Target, site [32]byte) (*accounts, error) {
	engine, err := loads.New(cfg)
	if err != nil {
		return nil, err
	}
	a := &accounts{cfg: cfg, rules: rulesOf(site, &cfg), file: site, engine: engine}
	for i := range cfg.Loads {
		a.byLoad = append(a.byLoad, rulesOfLoad(&cfg, i))
	}
	for _, t := range targets {
		a.judges = append(a.judges, design.NewJudge(t))
	}
	return a, nil
}

// mostGap is the longest time that is booked as missing at one time. More is no outage
// but a clock that was set by years: of that the last firstReach is booked, as where
// accounts begin.
const mostGap = 366 * 24 * time.Hour

// advance puts one beat through and returns the minutes that closed; they are
// good until the next call.
func (a *accounts) advance(b loads.Beat) []loads.Minute {
	if from := a.engine.Through(); from > 0 && b.Through-from > int64(mostGap) {
		a.engine.Adopt(loads.Beat{Through: b.Through - int64(firstReach)})
	}
	a.closed = a.engine.Advance(b, a.closed[:0])
	for _, m := range a.closed {
		lasting, random := m.Doubt()
		a.judges[m.Load].Observe(design.Minute{
			Start:       m.Start,
			Whole:       m.Measured-m.Idle >= int64(wholeMinute),
			Duty:        m.Duty,
			Uncertainty: lasting,
			Random:      random,
		})
	}
	return a.closed
}

// savedAccounts is the state of engine and judges; judges by the name of their
// load.
type savedAccounts struct {
	Rules  [32]byte            // that the accounts were kept by; see rulesOf
	File   [32]byte            // digest of the site file
	Loads  map[string][32]byte // those of each load; see rulesOfLoad
	Engine []byte
	Judges map[string]savedJudge

	Site, Zone string            // name of the plant, and time zone of its reports
	Units      map[string]string // SI unit of the readings of each tag, also of former ones
}

type savedJudge struct {
	Last    design.Verdict
	Minutes []design.Minute
}

// save returns the state that restore goes on from.
func (a *accounts) save() ([]byte, error) {
	engine, err := a.engine.Save()
	if err != nil {
		return nil, err
	}
	s := savedAccounts{Rules: a.rules, File: a.file, Engine: engine, Judges: make(map[string]savedJudge, len(a.judges)), Loads: make(map[string][32]byte, len(a.judges))}
	for i, j := range a.judges {
		s.Judges[a.cfg.Loads[i].Name] = savedJudge{j.Last, j.Minutes}
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
	a.kept = make([]bool, len(a.judges))
	for i, j := range a.judges {
		if was, ok := s.Judges[a.cfg.Loads[i].Name]; ok {
			a.kept[i] = true
			j.Restore(was.Last, was.Minutes)
		}
	}
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
