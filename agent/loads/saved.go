package loads

import (
	"bytes"
	"encoding/gob"
	"fmt"
)

// savedVersion is that of the states this program writes. Those of version 1 have no
// undecided time and none of what came with it, those of version 2 no marks and no uncertain
// time; they are read as such.
const savedVersion = 3

// saved is the engine's state by name, so that a plant whose site file has
// gained or lost tags and loads keeps the accounts of the others.
type saved struct {
	Version int
	Grid    int64
	Next    int64
	Through int64
	Tags    map[string]tagState
	Loads   map[string]loadState
}

// Save returns the state from which [Engine.Restore] goes on to the same bits.
func (e *Engine) Save() ([]byte, error) {
	s := saved{
		Version: savedVersion, Grid: e.cfg.Grid, Next: e.next, Through: e.through,
		Tags:  make(map[string]tagState, len(e.tags)),
		Loads: make(map[string]loadState, len(e.loads)),
	}
	for i, t := range e.tags {
		t.Meaning = e.cfg.Tags[i].Meaning
		s.Tags[e.cfg.Tags[i].Name] = t
	}
	for i, l := range e.loads {
		s.Loads[e.cfg.Loads[i].Name] = l
	}
	var buf bytes.Buffer
	if err := gob.NewEncoder(&buf).Encode(s); err != nil {
		return nil, fmt.Errorf("save engine state: %w", err)
	}
	return buf.Bytes(), nil
}

// Restore takes up the state that Save wrote. Tags and loads that the state does
// not know begin afresh, and so do tags whose numbers mean something else now; those
// that the plant no longer has are left out. The registers and the open minute survive a
// change of grid, the rolling windows do not. Time that was not decided and cannot be any
// more, for another grid or because the flow is counted now or is no longer, is missing.
func (e *Engine) Restore(state []byte) error {
	var s saved
	if err := gob.NewDecoder(bytes.NewReader(state)).Decode(&s); err != nil {
		return fmt.Errorf("restore engine state of %d bytes: %w", len(state), err)
	}
	if s.Version < 1 || s.Version > savedVersion {
		return fmt.Errorf("restore engine state: version %d is not known, this program writes %d", s.Version, savedVersion)
	}
	e.next, e.through = s.Next, s.Through
	if s.Grid != e.cfg.Grid {
		e.next = ceil(e.next, e.cfg.Grid)
	}
	renewed := make(map[string]bool)
	for i := range e.tags {
		tag := &e.cfg.Tags[i]
		t, ok := s.Tags[tag.Name]
		switch {
		case ok && t.of(tag):
			if tag.Screen == nil || t.Screen == nil {
				t.Screen = e.tags[i].Screen
			}
			e.tags[i] = t
		case ok:
			e.renewed[i], renewed[tag.Name] = true, true
		}
	}
	for i := range e.loads {
		l, ok := s.Loads[e.cfg.Loads[i].Name]
		if !ok {
			continue
		}
		for k := range l.Trends {
			if renewed[l.Trends[k].Tag] {
				l.Trends[k] = trend{}
			}
		}
		e.loads[i].resume(l, &s, e.next)
	}
	return nil
}

// Renewed reports whether the tag's numbers mean something else than in the state that was
// restored, so that readings from before are not to be put through again.
func (e *Engine) Renewed(tag int) bool { return e.renewed[tag] }

// Drop gives up what the load waits for, after a change of what it is accounted by: its
// undecided time is missing.
func (e *Engine) Drop(load int) {
	l := &e.loads[load]
	l.Registers.Missing += e.next - l.decided(e.next)
	l.drop()
}

// SetRegisters gives load the totals that an earlier run left, where its state is
// lost.
func (e *Engine) SetRegisters(load int, t Totals) {
	e.loads[load].Registers = Registers{
		Given: Sum{Hi: t.Given}, Taken: Sum{Hi: t.Taken},
		BridgedGiven: Sum{Hi: t.BridgedGiven}, BridgedTaken: Sum{Hi: t.BridgedTaken},
		Measured: t.Measured, Bridged: t.Bridged, Missing: t.Missing, Uncertain: t.Uncertain,
	}
}
