package sparkplug

import (
	"errors"
	"math"

	"heatreeve/ingest/quality"
)

// Options of a [Space].
type Options struct {
	// Want gives the number, from 0, of a metric that is wanted, or of the source itself
	// where name is nil; a negative one: not wanted. Each number is of one metric or source
	// only. It is asked for each metric of a birth, and for each that data name in full; it
	// must not keep name.
	Want func(s Source, name []byte) int
	// Told is told each property of a metric that is a text, such as its unit, as often as it
	// comes; nil: nobody is. It must not keep key and text.
	Told func(id int, key, text []byte)
	// Ahead is how far after its arrival a message may be stamped, ns, and Earliest the
	// oldest stamp that a clock which was set can have.
	Ahead, Earliest int64
	// Nodes is how many nodes are taken up without [Space.Follow]; 0: none. Devices bounds
	// those of one node, and Metrics the aliases of one; 0 stands for DefaultDevices and
	// DefaultMetrics.
	Nodes, Devices, Metrics int
	// Random gives numbers from 0 to below 1, by which requests for births are spread; nil:
	// nobody is asked for a birth.
	Random func() float64
}

// Defaults of [Options]; the figures are our own, far above what a gateway has.
const (
	DefaultDevices = 1000
	DefaultMetrics = 50_000
)

// Space is what the messages of a namespace have told so far. It serves one goroutine at
// a time.
type Space struct {
	o        Options
	nodes    map[Source]*node
	strange  int // nodes that are not followed
	metrics  []metric
	requests *Requests // nil: nobody is asked
	counts   Counts

	payload Payload
	at      Metric
	arrival int64
}

// node is an edge node.
type node struct {
	source
	devices  map[string]*source
	aliases  map[uint64]alias
	bdSeq    uint64 // of its birth
	pledged  bool   // there is one
	seq      sequence
	doubtful bool  // since the last message, births may have been missed
	lag      int64 // least of arrivals behind stamps since the birth, ns; math.MaxInt64: none
}

// source is an edge node by itself, or a device.
type source struct {
	Source
	id      int
	born    bool  // aliases and datatypes of its birth hold
	alive   bool  // as told to the user
	newest  int64 // instant of what was told of it last
	metrics []int // those that are wanted
}

// alias is what the births have told of one; of no source where two claim it.
type alias struct {
	of       *source
	id       int // of the metric; negative: not wanted
	datatype Datatype
}

// metric is one that is wanted.
type metric struct {
	of       *source
	datatype Datatype
	born     bool  // it was in the last birth of its source
	live     bool  // it has told a value since its source was last gone
	newest   int64 // instant of the newest value, or of its end
}

// NewSpace returns a space of which nothing is known.
func NewSpace(o Options) *Space {
	if o.Devices <= 0 {
		o.Devices = DefaultDevices
	}
	if o.Metrics <= 0 {
		o.Metrics = DefaultMetrics
	}
	s := &Space{o: o, nodes: make(map[Source]*node)}
	if o.Random != nil {
		s.requests = NewRequests(o.Random)
	}
	return s
}

// Counts returns what was met so far.
func (s *Space) Counts() Counts { return s.counts }

// Follow takes up the edge node of a source.
func (s *Space) Follow(of Source) {
	if of = of.EdgeNode(); s.nodes[of] == nil {
		s.nodes[of] = s.newNode(of)
	}
}

func (s *Space) newNode(of Source) *node {
	return &node{source: s.newSource(of), devices: make(map[string]*source), aliases: make(map[uint64]alias), lag: math.MaxInt64}
}

func (s *Space) newSource(of Source) source {
	return source{Source: of, id: s.o.Want(of, nil)}
}

// ErrStranger is returned by [Space.Take] for a source that there is no room for.
var ErrStranger = errors.New("is of a source that is not followed, or of one device too many")

// find returns the node of a topic and the source that the message is of.
func (s *Space) find(of Source) (*node, *source) {
	n := s.nodes[of.EdgeNode()]
	if n == nil {
		if s.strange >= s.o.Nodes {
			return nil, nil
		}
		s.strange++
		n = s.newNode(of.EdgeNode())
		s.nodes[n.Source] = n
	}
	if of.Device == "" {
		return n, &n.source
	}
	d := n.devices[of.Device]
	if d == nil && len(n.devices) < s.o.Devices {
		made := s.newSource(of)
		d = &made
		n.devices[of.Device] = d
	}
	return n, d
}

// Take appends to out what a message says of the metrics that are wanted. The error
// says that the message is none, and then nothing of it is used; its text begins with a
// verb. arrival is in Unix nanoseconds. The payload is not kept. A retained message is
// not one of an edge node, and must not be given.
func (s *Space) Take(t Topic, payload []byte, arrival int64, out []Reading) ([]Reading, error) {
	if t.Kind == NCommand || t.Kind == DCommand || t.Kind == StateOfHost {
		return out, nil
	}
	n, src := s.find(t.Source)
	if src == nil {
		s.counts.Crowded++
		return out, ErrStranger
	}
	s.arrival = arrival
	before := len(out)
	out, err := s.take(n, src, t.Kind, payload, out)
	if err != nil {
		s.counts.Malformed++
		return out[:before], err
	}
	s.note(out[before:])
	return out, nil
}

func (s *Space) take(n *node, src *source, k Kind, payload []byte, out []Reading) ([]Reading, error) {
	if err := s.payload.Open(payload); err != nil {
		return out, err
	}
	switch k {
	case NBirth, DBirth:
		return s.birth(n, src, payload, out)
	case NDeath:
		return s.nodeDeath(n, out)
	}
	s.count(n)
	s.clock(n)
	if k == DDeath {
		return s.deviceDeath(n, src, out), nil
	}
	return s.data(n, src, out)
}

// note keeps what was told of the metrics.
func (s *Space) note(told []Reading) {
	for i := range told {
		r := &told[i]
		if r.ID >= len(s.metrics) {
			continue // a source
		}
		if m := &s.metrics[r.ID]; m.of != nil && r.Wrong == Right && !r.Historical {
			m.newest = max(m.newest, r.At)
			m.live = r.Mark != quality.Offline
		}
	}
}

// metric returns the state of a metric that is wanted, made when it is first heard of.
func (s *Space) metric(id int, src *source) *metric {
	for id >= len(s.metrics) {
		s.metrics = append(s.metrics, metric{})
	}
	m := &s.metrics[id]
	if m.of == nil {
		m.of = src
		src.metrics = append(src.metrics, id)
	}
	return m
}

// count follows the sequence of the node. Values stay when a message is missing. But
// behind a connection that was lost a birth may be among what was missed, so aliases do
// not hold any more.
func (s *Space) count(n *node) {
	if !s.payload.Numbered {
		return
	}
	gap, late := n.seq.take(s.payload.Seq)
	switch {
	case late:
		s.counts.Reordered++
		if n.seq.open == 0 && n.born && s.requests != nil {
			s.requests.Cancel(n.Source)
		}
	case gap > 0:
		s.counts.Gaps++
		s.counts.Missed += uint64(gap)
		if n.doubtful {
			n.forget()
		}
		s.ask(n)
	}
	n.doubtful = false
}

// forget drops what births have told of aliases and datatypes.
func (n *node) forget() {
	clear(n.aliases)
	n.born = false
	for _, d := range n.devices {
		d.born = false
	}
}

func (s *Space) ask(n *node) {
	if s.requests != nil {
		s.requests.Ask(n.Source, s.arrival)
	}
}

// AskAll plans to ask the followed nodes for their births, as after a connection was made.
// Without [Options.Random] it does nothing.
func (s *Space) AskAll(now int64) {
	if s.requests == nil {
		return
	}
	for of := range s.nodes {
		s.requests.AskSoon(of, now)
	}
}

// Requests returns the nodes that are to be asked for their births now; see [Requests.Due].
func (s *Space) Requests(now int64) []Source {
	if s.requests == nil {
		return nil
	}
	due := s.requests.Due(now)
	s.counts.Requests += uint64(len(due))
	return due
}
