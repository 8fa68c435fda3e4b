package ingest

import (
	"fmt"
	"math"
	"strings"
	"sync"
	"time"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/sparkplug"
)

// plug reads the tags that are metrics of a Sparkplug B namespace.
type plug struct {
	tags    []Tag
	metrics map[sparkplug.Source]map[string]int // tags by source and name; "" whether it is alive
	nodes   []sparkplug.Source
	known   map[sparkplug.Source]bool // those of nodes

	mu       sync.Mutex
	space    *sparkplug.Space
	readings []sparkplug.Reading // of the message at hand
	retained uint64
	fault    string // of the last message that could not be read
}

// SparkplugStats are the counts of a session's Sparkplug B namespace.
type SparkplugStats struct {
	sparkplug.Counts
	Retained uint64 // messages that the broker had kept, against the standard, and which tell nothing
	Last     string // the last message that could not be read, and why; "": none yet
}

// plugIn takes up a tag that reads a metric.
func (d *Decoder) plugIn(i int, tag Tag) error {
	if d.plug == nil {
		d.plug = &plug{tags: d.tags, metrics: make(map[sparkplug.Source]map[string]int), known: make(map[sparkplug.Source]bool)}
	}
	return d.plug.add(i, tag.Metric)
}

func (p *plug) add(i int, m *Metric) error {
	of := p.metrics[m.Source]
	if of == nil {
		of = make(map[string]int)
		p.metrics[m.Source] = of
	}
	if other, twice := of[m.Name]; twice {
		return fmt.Errorf("tags %q and %q read the same metric %q of %q", p.tags[other].Name, p.tags[i].Name, m.Name, m.Source)
	}
	of[m.Name] = i
	if node := m.Source.EdgeNode(); !p.known[node] {
		p.known[node] = true
		p.nodes = append(p.nodes, node)
	}
	return nil
}

func (p *plug) want(s sparkplug.Source, name []byte) int {
	if i, ok := p.metrics[s][string(name)]; ok && (len(name) > 0) == (p.tags[i].Liveness == nil) {
		return i
	}
	return -1
}

// start begins with nothing known, once all tags are there. Where nodes may be asked for
// their births, random spreads that.
func (p *plug) start(ahead time.Duration, random func() float64) {
	if p == nil {
		return
	}
	p.space = sparkplug.NewSpace(sparkplug.Options{Want: p.want, Ahead: int64(ahead), Earliest: clockSet, Random: random})
	for _, node := range p.nodes {
		p.space.Follow(node)
	}
}

// filters are what the tags need to be subscribed to.
func (p *plug) filters() []*topic {
	if p == nil {
		return nil
	}
	var all []*topic
	for _, node := range p.nodes {
		for _, f := range node.Filters() {
			all = append(all, &topic{name: f, qos: 1})
		}
	}
	return all
}

// decode appends what a message says of the tags, and reports whether it is one of a node
// that they read from.
func (p *plug) decode(topic string, payload []byte, arrival int64, retained bool, out []Outcome) ([]Outcome, bool) {
	if p == nil || !strings.HasPrefix(topic, sparkplug.Prefix) {
		return out, false
	}
	t, ok := sparkplug.ParseTopic(topic)
	if !ok || !p.known[t.EdgeNode()] {
		return out, false
	}
	p.mu.Lock()
	defer p.mu.Unlock()
	if retained {
		p.retained++
		return out, true
	}
	var err error
	if p.readings, err = p.space.Take(t, payload, arrival, p.readings[:0]); err != nil {
		p.fault = fmt.Sprintf("topic %q: payload %s %v", topic, shortened(payload), err)
		return out, true
	}
	for i := range p.readings {
		out = append(out, p.outcome(&p.readings[i], payload, arrival))
	}
	return out, true
}

// lost appends that nothing is known any more: the connection was lost at now.
func (p *plug) lost(now int64, out []Outcome) []Outcome {
	p.mu.Lock()
	defer p.mu.Unlock()
	p.readings = p.space.Lost(now, p.readings[:0])
	for i := range p.readings {
		out = append(out, p.outcome(&p.readings[i], nil, now))
	}
	return out
}

func (p *plug) outcome(r *sparkplug.Reading, payload []byte, arrival int64) Outcome {
	tag := &p.tags[r.ID]
	o := Outcome{Reading: Reading{Tag: r.ID, At: r.At, Stamped: r.Stamped, Mark: r.Mark}}
	f := p.fill(&o.Reading, tag, r)
	if f == nil {
		return o
	}
	text, cut := excerpt(payload)
	o.Refusal = &Refusal{Tag: tag.Name, Reason: f.reason, Payload: text, Cut: cut, At: arrival, Detail: f.detail}
	if tag.Holds && voids[f.reason] && r.At != 0 {
		o.Void, o.Value, o.Mark = true, math.NaN(), quality.Refused
	}
	return o
}

func (p *plug) fill(o *Reading, tag *Tag, r *sparkplug.Reading) *fault {
	wrong, x := r.Wrong, r.Value
	switch {
	case wrong != sparkplug.Right || !r.Truth:
	case tag.Truth:
		x /= tag.Scale
	case r.Mark.Quality() != quality.Bad:
		wrong = sparkplug.NotNumber
	}
	if wrong != sparkplug.Right {
		f := wrongs[wrong]
		return faultf(f.reason, f.detail, tag.Metric.Name, r.Datatype)
	}
	if f := tag.inSI(o, x); f != nil {
		return f
	}
	return tag.inRange(o, x)
}

// wrongs are the refusals of metrics; their details take the metric's name and datatype.
var wrongs = map[sparkplug.Wrong]fault{
	sparkplug.Transient:  {Transient, "has metric %q (%v) as transient, which is not to be stored; let the publisher leave that out"},
	sparkplug.Missing:    {ValueMissing, "has metric %q (%v) without a value"},
	sparkplug.NotNumber:  {WrongType, "has in metric %q (%v) no number; choose one that is"},
	sparkplug.NoDatatype: {Unborn, "has in metric %q (%v) an integer, and no birth has told of which kind; let its node be born again, or allow the agent to ask for it"},
	sparkplug.Mismatch:   {WrongType, "has in metric %q (%v) a value that its datatype cannot have; check the publisher"},
	sparkplug.NotFinite:  {NotFinite, "has in metric %q (%v) a value that is not finite; publish null while there is none"},
	sparkplug.Undated:    {TimeMissing, "has metric %q (%v) as historical and without its time"},
	sparkplug.NoInstant:  {TimeWrong, "has metric %q (%v) stamped beyond all clocks"},
	sparkplug.UnsetClock: {UnsetClock, "has metric %q (%v) stamped before 2000; set the publisher's clock"},
	sparkplug.Ahead:      {Ahead, "has metric %q (%v) stamped in the future, further than is allowed; set the clocks by network time"},
}

// askAll plans to ask all nodes for their births, as after a connection was made.
func (p *plug) askAll(now int64) {
	if p == nil {
		return
	}
	p.mu.Lock()
	defer p.mu.Unlock()
	p.space.AskAll(now)
}

// due are the nodes to be asked now.
func (p *plug) due(now int64) []sparkplug.Source {
	p.mu.Lock()
	defer p.mu.Unlock()
	return p.space.Requests(now)
}

func (p *plug) stats() SparkplugStats {
	if p == nil {
		return SparkplugStats{}
	}
	p.mu.Lock()
	defer p.mu.Unlock()
	return SparkplugStats{Counts: p.space.Counts(), Retained: p.retained, Last: p.fault}
}
