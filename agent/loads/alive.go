package loads

import (
	"fmt"
	"math"
)

// standing tells whether what a tag that reports by exception holds may be used.
type standing uint8

const (
	holds     standing = iota
	unheard            // its liveness tag has sent nothing yet
	gone               // its liveness tag says that the source has gone, or is bad
	silent             // there has been no sign of life for too long
	unrenewed          // the source is back, and the reading is from before
)

// standing is that of an on-change tag at the grid point g. Signs of life are the
// readings of its liveness tag, and its own: a source that has just told a value lives.
// Before the liveness tag was ever heard nothing holds, but that is no lapse by itself.
func (e *Engine) standing(tag int, g int64) standing {
	t, alive := &e.tags[tag], e.cfg.Tags[tag].Alive
	a := &e.tags[alive].Held
	switch {
	case !a.Has:
		return unheard
	case a.Value == 0 || a.bad():
		return gone
	case g >= after(max(a.At, t.Held.At), e.cfg.Tags[alive].MaxAge):
		return silent
	case t.Held.At <= t.Lapse:
		return unrenewed
	}
	return holds
}

// lapse notes which on-change tags had no sign of life at g: what they held by then holds
// no more. Figures that this changes are worked anew.
func (e *Engine) lapse(g int64) {
	for _, i := range e.onChange {
		t := &e.tags[i]
		s := e.standing(i, g)
		if s == gone || s == silent || s == unheard && g >= after(t.Held.At, e.cfg.Tags[e.cfg.Tags[i].Alive].MaxAge) {
			t.Lapse = g
		}
		if s != t.standing {
			t.standing = s
			e.touch(i)
		}
	}
}

// unusable is the fault of an on-change tag that stands so, with its reason.
func (e *Engine) unusable(tag int, s standing) (Fault, string) {
	name := e.cfg.Tags[tag].Name
	alive := &e.cfg.Tags[e.cfg.Tags[tag].Alive]
	switch s {
	case unheard:
		return NoReading, fmt.Sprintf("tag %q has no reading yet, and only it tells whether %q still holds", alive.Name, name)
	case gone:
		return Stale, fmt.Sprintf("tag %q says that the source of %q has gone", alive.Name, name)
	case silent:
		return Stale, fmt.Sprintf("tag %q, the sign of life of %q, is older than %g s", alive.Name, name, float64(alive.MaxAge)/1e9)
	}
	return Stale, fmt.Sprintf("tag %q has not reported since its source was last gone by tag %q", name, alive.Name)
}

// expiry is when what src holds by the grid point g, or has waiting, runs out of age.
func (e *Engine) expiry(src Source, g int64) int64 {
	if src.Tag < 0 {
		return math.MaxInt64
	}
	tag := &e.cfg.Tags[src.Tag]
	newest, age := e.tags[src.Tag].newest(), tag.MaxAge
	if tag.OnChange {
		newest, age = max(newest, e.tags[tag.Alive].newest()), e.cfg.Tags[tag.Alive].MaxAge
	}
	return after(min(newest, g), age)
}

func (t *tagState) newest() int64 { return max(t.Held.At, t.Newest) }

// after returns the instant that lies age behind at; MaxInt64 where it is beyond all
// time.
func after(at, age int64) int64 {
	if at > math.MaxInt64-age {
		return math.MaxInt64
	}
	return at + age
}
