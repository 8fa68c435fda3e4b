package loads

import (
	"math"
	"slices"
)

// Snapshot is what the engine knows at one instant; nothing changes it later.
type Snapshot struct {
	Through int64 // every interval that ends by then is booked
	Loads   []LoadState
	Tags    []TagState
}

// LoadState is one load in a [Snapshot]; heat in J, times in ns.
type LoadState struct {
	Figure Figure // at the last grid point
	// Until is when the first input that the figure needs runs out of age, counted
	// from the newest reading of each tag, also one that event time has not
	// reached, but at most from the figure's own grid point; MaxInt64 for constants
	// alone.
	Until int64
	Means [len(Windows)]Mean
	Totals
	// Undecided is the time, ns, up to the snapshot's Through that is in no total yet,
	// since what comes next decides on it: a gap that may be bridged, or what a counter
	// has not told yet.
	Undecided int64
}

// Totals are the registers of a load as numbers: heat in J, times in ns.
type Totals struct {
	Given, Taken               float64
	BridgedGiven, BridgedTaken float64
	Measured, Bridged, Missing int64
	Uncertain                  int64 // within Measured: an uncertain reading was used
}

// TagState is one tag in a [Snapshot].
type TagState struct {
	Newest int64 // stamp of the newest reading taken; 0 before the first
	Tally
	// Doubted counts the readings taken that have a mark, their source's or that of a test,
	// by mark.
	Doubted []Doubted
}

// Snapshot returns the present state.
func (e *Engine) Snapshot() Snapshot {
	s := Snapshot{
		Through: e.next,
		Loads:   make([]LoadState, len(e.loads)),
		Tags:    make([]TagState, len(e.tags)),
	}
	for i := range e.loads {
		s.Loads[i] = e.loads[i].snapshot(e.live(i), e.next)
		s.Loads[i].Until = e.until(i, s.Loads[i].Figure.Idle)
	}
	for i := range e.tags {
		s.Tags[i] = TagState{Newest: e.tags[i].Newest, Tally: e.tally[i]}
		if e.doubted != nil {
			s.Tags[i].Doubted = slices.Clone(e.doubted[i])
		}
	}
	return s
}

// Through is [Snapshot.Through] alone.
func (e *Engine) Through() int64 { return e.next }

// until is [LoadState.Until] of a load; an idle stream needs only its flow.
func (e *Engine) until(load int, idle bool) int64 {
	needs := e.equations[load].needs
	if idle && e.cfg.Loads[load].Vessel == nil {
		needs = needs[:1]
	}
	until := int64(math.MaxInt64)
	for _, src := range needs {
		until = min(until, e.expiry(src, e.loads[load].figure.At))
	}
	return until
}

func (l *loadState) snapshot(live Figure, through int64) LoadState {
	s := LoadState{
		Figure: live,
		Totals: l.Registers.totals(),
	}
	s.Undecided = through - l.decided(through)
	if l.figure.At == 0 {
		s.Figure.Fault, s.Figure.Reason = NoReading, "no reading yet"
	}
	for k := range l.Windows {
		s.Means[k] = l.Windows[k].mean(through)
	}
	return s
}

func (r *Registers) totals() Totals {
	return Totals{
		Given: r.Given.Value(), Taken: r.Taken.Value(),
		BridgedGiven: r.BridgedGiven.Value(), BridgedTaken: r.BridgedTaken.Value(),
		Measured: r.Measured, Bridged: r.Bridged, Missing: r.Missing, Uncertain: r.Uncertain,
	}
}
