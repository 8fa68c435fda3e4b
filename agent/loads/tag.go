package loads

import (
	"slices"
	"sort"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/screen"
)

const (
	maxPending = 4096 // grid steps for which readings of one tag wait for event time
	maxRecent  = 128  // stamps of one tag remembered to tell a repeat from a late reading
)

// Receipt says what became of a reading.
type Receipt uint8

const (
	Taken    Receipt = iota // waits for, or has reached, its grid point
	Repeated                // same tag and stamp as one already taken: dropped
	Late                    // its interval is booked: changes no figure
	Crowded                 // too many readings of the tag wait: dropped
)

// sample is a reading without its tag.
type sample struct {
	At    int64
	Value float64
	Mark  quality.Mark
}

// bad reports whether the reading says that there is no value.
func (s *sample) bad() bool { return s.Mark.Quality() == quality.Bad }

// tagState is what the engine keeps of one tag. Exported fields are part of the
// engine's saved state.
type tagState struct {
	Held    held
	Pending []sample // stamped after the last booked grid point, by stamp
	Newest  int64    // newest stamp taken; 0 before the first
	Scatter scatter  // of the readings held so far
	// Lapse is the newest grid point at which an on-change tag had no sign of life: a
	// reading from before it does not hold. 0 for none.
	Lapse    int64
	Open     int64         // of a bypass: since when it has been open, 0 where it is not
	Count    count         // of a counter
	Screen   *screen.State // nil where nothing is tested
	Meaning  string        // of the tag when it was saved; empty in states from before it was told
	standing standing      // of an on-change tag at the grid point last computed
	recent   []int64       // ring of stamps taken
	next     int           // where the ring is written next
}

// of reports whether the state is one of readings that mean what those of the tag do.
func (t *tagState) of(tag *Tag) bool {
	if t.Meaning == "" {
		return tag.Counter == nil || !t.Held.Has || t.Count.At != 0
	}
	return t.Meaning == tag.Meaning
}

// take files one reading. Booked is the newest grid point already computed. Of the
// readings that fall to one grid point only the last can be held there, so only it
// waits.
func (t *tagState) take(s sample, booked, grid int64) Receipt {
	if s.At <= booked {
		if t.Held.Has && t.Held.At == s.At || slices.Contains(t.recent, s.At) {
			return Repeated
		}
		return Late
	}
	n := len(t.Pending)
	i := n
	if n > 0 && s.At <= t.Pending[n-1].At {
		i = sort.Search(n, func(k int) bool { return t.Pending[k].At >= s.At })
		if t.Pending[i].At == s.At {
			return Repeated
		}
	}
	if s.At <= t.Newest && slices.Contains(t.recent, s.At) {
		return Repeated
	}
	switch {
	case i < n && ceil(t.Pending[i].At, grid) == ceil(s.At, grid):
		// a later one of the same grid point waits already
	case i > 0 && ceil(t.Pending[i-1].At, grid) == ceil(s.At, grid):
		t.Pending[i-1] = s
	case n >= maxPending:
		return Crowded
	default:
		t.Pending = slices.Insert(t.Pending, i, s)
	}
	t.Newest = max(t.Newest, s.At)
	t.remember(s.At)
	return Taken
}

func (t *tagState) remember(at int64) {
	if len(t.recent) < maxRecent {
		t.recent = append(t.recent, at)
		return
	}
	t.recent[t.next] = at
	t.next = (t.next + 1) % maxRecent
}

// hold moves the readings of a tag stamped at or before g out of the wait, tests them, and
// holds the newest; it reports whether the held value changed. Those of a tag whose readings
// scatter tell how far, from one that is not older than its maximum age to the next; so every
// reading counts that is held at a grid point, and no other, and of those no bad one. Of a
// tag whose readings are amounts, the sum is held, in the order of their stamps, and is no
// better than the worst of them.
func (e *Engine) hold(tag int, g int64) bool {
	t, cfg := &e.tags[tag], &e.cfg.Tags[tag]
	n := 0
	for n < len(t.Pending) && t.Pending[n].At <= g {
		n++
	}
	if n == 0 {
		return false
	}
	scatters, adds := cfg.scatters(), cfg.adds()
	for k := range t.Pending[:n] {
		s := &t.Pending[k]
		if cfg.Screen != nil && e.aside(tag, s) {
			continue
		}
		if scatters {
			t.Scatter.observe(&t.Held, s, cfg.MaxAge)
		}
		if adds && k > 0 {
			s.Value += t.Held.Value
			s.Mark = quality.Worse(s.Mark, t.Held.Mark)
		}
		h := &t.Held
		if e.bypasses[tag] {
			t.Open = t.opened(s, cfg.MaxAge)
		}
		h.At, h.Value, h.Has, h.Mark, h.Aside = s.At, s.Value, true, s.Mark, false
	}
	t.Pending = t.Pending[:copy(t.Pending, t.Pending[n:])]
	return true
}

// aside tests a reading, which gets the mark of what is found. Where it is to be set aside,
// the value before it is held on in its place, and is uncertain for it. Bad readings are not
// tested.
func (e *Engine) aside(tag int, s *sample) bool {
	if s.bad() {
		return false
	}
	t := &e.tags[tag]
	found, aside := e.cfg.Tags[tag].Screen.Judge(t.Screen, s.At, s.Value)
	if worst := quality.Worse(s.Mark, found); worst != s.Mark {
		s.Mark = worst
		e.doubt(tag, found)
	}
	if !aside || !t.Held.Has || t.Held.bad() {
		return false
	}
	t.Held.At, t.Held.Aside = s.At, true
	t.Held.Mark = quality.Worse(t.Held.Mark, found)
	return true
}
