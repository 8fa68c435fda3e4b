// Package warn keeps what people have done about warnings: the roll of those that stand and
// of those that are over and were not acknowledged, with the marks of operators. It is pure:
// instants are arguments, Unix nanoseconds, and nothing in it changes a verdict.
//
// The words are those of ANSI/ISA-18.2 (IEC 62682). A warning is unacknowledged when it
// begins; an operator acknowledges it; it returns to normal by itself. One that returns
// unacknowledged stays on the roll until it is acknowledged, or for [Kept]. An
// acknowledgement ends with its warning. A warning that begins again within [Again] of its
// end is the same one: its event goes on, it has begun once more, and it is unacknowledged
// again. To shelve is to say beforehand, for a bounded time, that warnings of one kind on one
// subject are known: they go on being raised and kept, and who is told of warnings may leave
// shelved ones out.
//
// There is one entry a subject and kind: its latest warning. Earlier ones are events of the
// history.
package warn

import (
	"time"

	"heatreeve/agent/design"
)

const (
	// Again is how soon after its end a warning that begins again is the same one. Common
	// practice, no source.
	Again = int64(time.Hour)
	// Kept is how long a warning that has returned unacknowledged stays on the roll.
	Kept = int64(30 * 24 * time.Hour)
	// ShelfTime is for how long a shelf is unless told otherwise, and MostShelfTime at most.
	ShelfTime     = int64(8 * time.Hour)
	MostShelfTime = int64(30 * 24 * time.Hour)
)

// State is where a warning stands with its operators. Its text is part of the agent's
// interface.
type State string

// The states.
const (
	Unacknowledged State = "unacknowledged"
	Acknowledged   State = "acknowledged"
	Returned       State = "returned, unacknowledged" // to normal
	Normal         State = "normal"
)

// Mark is what an operator has said: who, why, and when.
type Mark struct {
	By, Reason string
	At         int64
}

// Entry is the latest warning of one kind on one subject.
type Entry struct {
	design.Warning
	Number  uint64 // of its event in the history, which is at Begin
	Times   int    // how often it has begun
	Earlier int    // warnings before it that returned unacknowledged, and so were not seen
	Mark    *Mark  // acknowledged; nil while it is not
	Seen    bool   // over, and acknowledged, or kept for long enough
}

// State tells where the warning stands.
func (e *Entry) State() State {
	switch {
	case e.End == 0 && e.Mark == nil:
		return Unacknowledged
	case e.End == 0:
		return Acknowledged
	case !e.Seen:
		return Returned
	}
	return Normal
}

// Shelf is that warnings of one kind on one subject are known until an instant.
type Shelf struct {
	Subject string
	Kind    design.Kind
	Until   int64
	Mark
}

// Roll holds all of it. The zero value is empty.
type Roll struct {
	Entries []Entry // one a subject and kind
	Shelves []Shelf // likewise
}

// Clone returns a roll that shares nothing that changes.
func (r *Roll) Clone() Roll {
	return Roll{append([]Entry(nil), r.Entries...), append([]Shelf(nil), r.Shelves...)}
}

func (r *Roll) entry(subject string, k design.Kind) *Entry {
	for i := range r.Entries {
		if e := &r.Entries[i]; e.Subject == subject && e.Kind == k {
			return e
		}
	}
	return nil
}
