// Package proving holds a site file against what its broker really sends, before anyone
// relies on it: tag by tag whether it is heard, how often, with what values and stamps,
// and load by load a first duty, with what about it looks like a mistake.
//
// It judges by what it is given: readings as a session decoded them, and how far event
// time has come. It has no clock and opens nothing.
package proving

import (
	"math"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
)

// Level is how grave a finding is.
type Level uint8

const (
	Note  Level = iota + 1 // may be as it should be
	Fault                  // no load can rely on it
)

// Finding is something about a tag or a load that an engineer should look at.
type Finding struct {
	Level Level
	Text  string
}

// Heard is a reading with what came along with it.
type Heard struct {
	loads.Reading
	Arrival  int64
	Stamped  bool
	Retained bool
}

// Refused are the messages of a tag that no reading was made of.
type Refused struct {
	Reason string
	Count  uint64
	Last   string // the last one in words; only of the last reason
}

// Trial gathers what a site's broker sends.
type Trial struct {
	site    *site.Site
	cfg     loads.Config
	engine  *loads.Engine
	other   *loads.Engine // the same with each volume meter in the other pipe
	tags    []tagTrial
	minutes [2][]tally // of engine and other, by load
	through int64
	closed  []loads.Minute
}

// tally is what a witness counted, and what the load served meanwhile, J.
type tally struct{ witness, compared float64 }

// New returns a trial that has heard nothing. cfg is what the engine makes of the site.
func New(s *site.Site, cfg loads.Config) (*Trial, error) {
	swapped := cfg
	swapped.Loads = append([]loads.Load(nil), cfg.Loads...)
	for i := range swapped.Loads {
		if l := &swapped.Loads[i]; l.Vessel == nil {
			l.Stream.MeterAtOutlet = !l.Stream.MeterAtOutlet
		}
	}
	t := &Trial{site: s, cfg: cfg, tags: make([]tagTrial, len(s.Tags))}
	var err error
	if t.engine, err = loads.New(cfg); err != nil {
		return nil, err
	}
	if t.other, err = loads.New(swapped); err != nil {
		return nil, err
	}
	for k := range t.minutes {
		t.minutes[k] = make([]tally, len(s.Loads))
	}
	return t, nil
}

// Hear takes in readings in the order of their arrival. Event time follows the newest
// stamp that is not of a message from before.
func (t *Trial) Hear(all []Heard) {
	readings := make([]loads.Reading, len(all))
	newest := t.through
	for i, h := range all {
		t.tags[h.Tag].hear(h)
		readings[i] = h.Reading
		if !h.Retained && h.At <= h.Arrival+int64(t.site.Timing.Ahead) {
			newest = max(newest, h.At)
		}
	}
	t.advance(readings, newest-int64(t.site.Timing.Lateness))
	t.through = newest
}

func (t *Trial) advance(readings []loads.Reading, through int64) {
	for k, e := range []*loads.Engine{t.engine, t.other} {
		t.closed = e.Advance(loads.Beat{Readings: readings, Through: through}, t.closed[:0])
		for _, m := range t.closed {
			w := &t.minutes[k][m.Load]
			w.witness += m.Witness
			w.compared += m.Compared
		}
	}
}

// Result is what a trial came to.
type Result struct {
	Seconds float64
	Tags    []Tag // those that the file declares, and the signs of life behind them
	Loads   []Load
}

// Faults counts the findings that no load can rely on.
func (r *Result) Faults() int {
	n := 0
	count := func(all []Finding) {
		for _, f := range all {
			if f.Level == Fault {
				n++
			}
		}
	}
	for i := range r.Tags {
		count(r.Tags[i].Findings)
	}
	for i := range r.Loads {
		count(r.Loads[i].Findings)
	}
	return n
}

// Tell ends the trial, which lasted so many seconds. refused are, by tag, the messages
// that came to nothing.
func (t *Trial) Tell(seconds float64, refused [][]Refused) Result {
	t.advance(nil, t.through+t.cfg.Grid)
	r := Result{Seconds: seconds}
	for i := range t.tags {
		r.Tags = append(r.Tags, t.tellTag(i, seconds, refused[i]))
	}
	for i := range t.site.Loads {
		r.Loads = append(r.Loads, t.tellLoad(i))
	}
	return r
}

// near tells whether a and b differ by no more than tolerance.
func near(a, b, tolerance float64) bool { return math.Abs(a-b) <= tolerance }
