package site

import (
	"time"

	"heatreeve/thermo/unit"
)

const day = 24 * time.Hour

// waiting is for how many steps of the grid the readings of a tag wait for event time.
const waiting = 4096

// timing reads the optional block; each key has its default.
func (r *reader) timing(o object) {
	t := &r.site.Timing
	*t = Timing{Grid: time.Second, Lateness: 5 * time.Second, Ahead: 30 * time.Second, Commit: 10 * time.Second, Beat: time.Second}
	block, ok := o.get("timing")
	if !ok {
		return
	}
	b := block.object("timing")
	b.setDuration("grid", &t.Grid, 100*time.Millisecond, time.Minute, "100 ms to 1 min")
	b.setDuration("lateness", &t.Lateness, 0, time.Hour, "0 s to 1 h")
	b.setDuration("ahead", &t.Ahead, time.Second, time.Hour, "1 s to 1 h")
	b.setDuration("commit", &t.Commit, time.Second, 10*time.Minute, "1 s to 10 min")
	b.setDuration("bridge", &t.Bridge, 0, 2*time.Hour, "0 s to 2 h")
	if v, ok := b.get("grid"); ok && time.Minute%t.Grid != 0 {
		v.fault("a minute is no whole number of steps of %v; allowed are steps such as 1 s, 2 s, 5 s, 10 s", t.Grid)
	} else if most := waiting * t.Grid; t.Lateness+t.Ahead > most {
		block.fault("lateness of %v and ahead of %v are more than readings wait for at a grid of %v; allowed are %v together", t.Lateness, t.Ahead, t.Grid, most)
	}
}

// history reads the optional block; each key has its default.
func (r *reader) history(o object) {
	h := &r.site.History
	*h = History{MaxAge: 730 * day, MaxBytes: 256 << 20}
	block, ok := o.get("history")
	if !ok {
		return
	}
	b := block.object("history")
	b.setDuration("keep", &h.MaxAge, day, 7300*day, "1 d to 7300 d")
	if v, ok := b.get("size"); ok {
		if size, ok := v.within(16<<20, 1<<40, "16 MiB to 1024 GiB", unit.Size); ok {
			h.MaxBytes = int64(size)
		}
	}
}

// setDuration overwrites a default where the key is there and right.
func (o object) setDuration(key string, d *time.Duration, lo, hi time.Duration, span string) {
	if v, ok := o.get(key); ok {
		if got, ok := v.duration(lo, hi, span); ok {
			*d = got
		}
	}
}
