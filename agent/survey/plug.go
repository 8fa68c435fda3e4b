package survey

import (
	"bytes"
	"slices"
	"strings"
	"unicode/utf8"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/sparkplug"
)

const (
	// mostNodes is how many Sparkplug edge nodes are followed, and mostMetrics how many
	// metrics of all of them.
	mostNodes   = 1000
	mostMetrics = 100_000
	// stampedAhead is how far ahead of this machine's clock a message may be stamped, ns,
	// to be read: the survey is to tell of clocks that are wrong.
	stampedAhead = reach
)

// plug is what is known of the Sparkplug namespace.
type plug struct {
	space   *sparkplug.Space
	ids     map[metric]int
	metrics []metric // by id
	out     []sparkplug.Reading
	units   map[int]property // by id
}

// property is one that names a unit.
type property struct{ key, text string }

// metric is one of a Sparkplug source.
type metric struct {
	source sparkplug.Source
	name   string
}

func newPlug() *plug {
	p := &plug{ids: make(map[metric]int), units: make(map[int]property)}
	p.space = sparkplug.NewSpace(sparkplug.Options{Want: p.want, Told: p.told, Ahead: stampedAhead, Nodes: mostNodes})
	return p
}

// want takes up every metric, but not the life of its source, and none by which a node is
// commanded.
func (p *plug) want(source sparkplug.Source, name []byte) int {
	if name == nil || bytes.HasPrefix(name, []byte("Node Control/")) {
		return -1
	}
	m := metric{source, string(name)}
	id, ok := p.ids[m]
	switch {
	case ok:
		return id
	case len(p.metrics) >= mostMetrics:
		return -1
	}
	p.ids[m] = len(p.metrics)
	p.metrics = append(p.metrics, m)
	return p.ids[m]
}

// told keeps the property that names the unit of a metric, as the newest message has it.
func (p *plug) told(id int, key, text []byte) {
	if slices.Contains(unitWords, plain(string(key))) && len(text) > 0 && len(text) <= longestWord && utf8.Valid(text) {
		p.units[id] = property{string(key), string(text)}
	}
}

// hearPlug takes in a message of the Sparkplug namespace. mu is held.
func (s *Survey) hearPlug(at sparkplug.Topic, m Message) {
	if at.Kind == sparkplug.StateOfHost || at.Kind == sparkplug.NCommand || at.Kind == sparkplug.DCommand {
		return
	}
	t := s.topic(at.Source.String())
	if t == nil {
		s.beyond++
		return
	}
	t.plug, t.shape = true, Plug
	t.count(m)
	if m.Retained {
		return // the standard has none
	}
	var err error
	if s.plug.out, err = s.plug.space.Take(at, m.Payload, m.At, s.plug.out[:0]); err != nil {
		return // it is among the space's counts
	}
	for _, r := range s.plug.out {
		s.plugReading(r, m.At)
	}
}

func (s *Survey) plugReading(r sparkplug.Reading, arrival int64) {
	of := s.plug.metrics[r.ID]
	t := s.topic(of.source.String())
	if t == nil {
		return
	}
	t.plug, t.shape = true, Plug
	place := t.place(of.name)
	if place == nil {
		return
	}
	place.unit = s.plug.units[r.ID]
	switch {
	case r.Wrong != sparkplug.Right:
		place.others++
		return
	case r.Mark.Quality() == quality.Bad:
		place.nulls++
		return
	case r.Truth:
		place.truth(r.Value != 0)
	default:
		place.figure(r.Value)
	}
	if r.Stamped && !r.Historical {
		place.stamps++
		place.lag(arrival - r.At)
	}
}

// figure takes in a number that came in no writing.
func (s *series) figure(x float64) {
	s.value(x)
	if _, after, ok := strings.Cut(number(x), "."); ok && len(after) < 6 {
		s.decimals = max(s.decimals, len(after))
	}
}
