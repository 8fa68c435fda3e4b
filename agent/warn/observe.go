package warn

import (
	"math"
	"slices"

	"heatreeve/agent/design"
)

// What has become of a warning or a shelf.
const (
	Began      = "began"
	BeganAgain = "began again" // the same one, see Again
	Over       = "over"
	RanOut     = "ran out" // of a shelf: its time is over
)

// Change is one thing that has happened on the roll by itself.
type Change struct {
	What  string
	Entry Entry // but of a shelf
	Shelf Shelf
}

// Observe takes in the warnings that were raised or are over since it was last called, in
// their order, and all that stand now. What the roll has as standing and is not any more, as
// where its subject has left the plant, is over at the instant at. Number gives new events
// their numbers.
func (r *Roll) Observe(changed, standing []design.Warning, at int64, number func() uint64) (told []Change) {
	for _, w := range changed {
		told = r.raise(told, w, number)
		if w.End != 0 {
			told = r.end(told, w)
		}
	}
	for _, w := range standing {
		told = r.raise(told, w, number)
		e := r.entry(w.Subject, w.Kind)
		e.Now, e.Significance, e.Causes = w.Now, w.Significance, w.Causes
		e.Greatest = greater(e.Greatest, w.Greatest)
	}
	for i := range r.Entries {
		e := &r.Entries[i]
		if e.End == 0 && !slices.ContainsFunc(standing, func(w design.Warning) bool { return w.Subject == e.Subject && w.Kind == e.Kind }) {
			over := e.Warning
			over.End = max(at, e.Begin)
			told = r.end(told, over)
		}
	}
	return told
}

// raise sees to it that the warning stands on the roll.
func (r *Roll) raise(told []Change, w design.Warning, number func() uint64) []Change {
	e := r.entry(w.Subject, w.Kind)
	fresh := Entry{Warning: w, Times: 1}
	fresh.End = 0
	switch {
	case e != nil && e.End == 0:
		return told
	case e != nil && w.Begin-e.End <= Again:
		e.Now, e.Greatest, e.Significance, e.Causes = w.Now, greater(e.Greatest, w.Greatest), w.Significance, w.Causes
		e.End, e.Seen, e.Mark = 0, false, nil
		e.Times++
		return append(told, Change{What: BeganAgain, Entry: *e})
	case e != nil:
		fresh.Number, fresh.Earlier = number(), e.unseen()
		*e = fresh
	default:
		fresh.Number = number()
		r.Entries = append(r.Entries, fresh)
	}
	return append(told, Change{What: Began, Entry: fresh})
}

// unseen counts the warnings that returned unacknowledged up to this one.
func (e *Entry) unseen() int {
	if e.State() == Returned {
		return e.Earlier + 1
	}
	return 0
}

// end ends the entry of a warning, and its acknowledgement with it.
func (r *Roll) end(told []Change, w design.Warning) []Change {
	e := r.entry(w.Subject, w.Kind)
	e.End, e.Now, e.Significance = w.End, w.Now, w.Significance
	e.Greatest = greater(e.Greatest, w.Greatest)
	if len(w.Causes) > 0 {
		e.Causes = w.Causes
	}
	e.Seen, e.Mark = e.Mark != nil, nil
	return append(told, Change{What: Over, Entry: *e})
}

// greater is the one of two deviations that is further from nothing.
func greater(a, b float64) float64 {
	if math.Abs(b) > math.Abs(a) {
		return b
	}
	return a
}

// Advance ends the shelves whose time is over at the instant at, and lets go of what has
// stayed on the roll for long enough.
func (r *Roll) Advance(at int64) (told []Change) {
	r.Shelves = slices.DeleteFunc(r.Shelves, func(s Shelf) bool {
		if s.Until > at {
			return false
		}
		told = append(told, Change{What: RanOut, Shelf: s})
		return true
	})
	for i := range r.Entries {
		if e := &r.Entries[i]; e.State() == Returned && at-e.End >= Kept {
			e.Seen = true
		}
	}
	return told
}

// Watched is a subject and a kind of warning that there can be on it, as it is now.
type Watched struct {
	Subject                       string
	Kind                          design.Kind
	Active, Acknowledged, Shelved bool
}

// Forget lets go of what has been seen of subjects that are not watched any more.
func (r *Roll) Forget(watched []Watched) {
	gone := func(subject string, k design.Kind) bool {
		return !slices.ContainsFunc(watched, func(w Watched) bool { return w.Subject == subject && w.Kind == k })
	}
	r.Entries = slices.DeleteFunc(r.Entries, func(e Entry) bool { return e.State() == Normal && gone(e.Subject, e.Kind) })
	r.Shelves = slices.DeleteFunc(r.Shelves, func(s Shelf) bool { return gone(s.Subject, s.Kind) })
}
