package sparkplug

import (
	"math"
	"unicode/utf8"

	"heatreeve/ingest/quality"
)

// bdSeqName is the metric of a node's birth and death that ties them together.
const bdSeqName = "bdSeq"

// birth takes up a source anew: what it has now, and under which aliases. Of a node that is
// born again in the same session the devices live on; in a new one they are gone until
// their own births.
func (s *Space) birth(n *node, src *source, payload []byte, out []Reading) ([]Reading, error) {
	bdSeq, pledged, err := s.survey()
	if err != nil {
		return out, err
	}
	at, stamped := s.sent()
	if !stamped {
		at = s.arrival
	}
	s.counts.Births++
	if src == &n.source {
		again := n.alive && n.pledged && pledged && bdSeq == n.bdSeq
		n.bdSeq, n.pledged = bdSeq, pledged
		n.forget()
		n.lag, n.doubtful = math.MaxInt64, false
		if s.requests != nil {
			s.requests.Cancel(n.Source)
		}
		if n.seq = (sequence{}); s.payload.Numbered {
			n.seq.start(s.payload.Seq)
		}
		for _, d := range n.devices {
			if !again {
				out = s.gone(d, at, stamped, out)
			}
		}
	} else {
		s.count(n)
		n.forgetDevice(src)
		if !n.born {
			s.counts.Unborn++
			s.ask(n)
		}
	}
	s.clock(n)
	out = s.living(src, out)
	for _, id := range src.metrics {
		s.metrics[id].born = false
	}
	src.born = true
	if err := s.payload.Open(payload); err != nil {
		return out, err
	}
	for {
		ok, err := s.payload.Next(&s.at)
		if err != nil {
			return out, err
		}
		if !ok {
			break
		}
		out = s.enrol(n, src, out)
	}
	return s.dropped(src, at, stamped, out), nil
}

// survey reads all metrics of a message once, before anything of it is used, and returns
// its bdSeq.
func (s *Space) survey() (bdSeq uint64, ok bool, err error) {
	for {
		more, err := s.payload.Next(&s.at)
		if !more || err != nil {
			return bdSeq, ok, err
		}
		if m := &s.at; string(m.Name) == bdSeqName && !m.Null && (m.field == fieldInt || m.field == fieldLong) {
			bdSeq, ok = m.bits, true
		}
	}
}

func (n *node) forgetDevice(d *source) {
	for key, a := range n.aliases {
		if a.of == d {
			delete(n.aliases, key)
		}
	}
}

// enrol keeps what a birth says of the metric at hand, and reads its value.
func (s *Space) enrol(n *node, src *source, out []Reading) []Reading {
	m := &s.at
	if len(m.Name) == 0 || len(m.Name) > longestName || !utf8.Valid(m.Name) {
		s.counts.Crowded++
		return out
	}
	id := s.o.Want(src.Source, m.Name)
	if m.Aliased {
		s.keep(n, m.Alias, alias{of: src, id: id, datatype: m.Datatype})
	}
	if id < 0 {
		return out
	}
	w := s.metric(id, src)
	w.born, w.datatype = true, m.Datatype
	return append(out, s.reading(src, id, m.Datatype, true))
}

// keep notes an alias. One that two metrics of a node claim is of neither: which of them a
// value is of, nobody can tell.
func (s *Space) keep(n *node, key uint64, a alias) {
	before, claimed := n.aliases[key]
	switch {
	case claimed && before != a:
		n.aliases[key] = alias{id: -1}
	case !claimed && len(n.aliases) >= s.o.Metrics:
		s.counts.Crowded++
	default:
		n.aliases[key] = a
	}
}

// dropped ends the metrics of a source that its new birth does not have any more.
func (s *Space) dropped(src *source, at int64, stamped bool, out []Reading) []Reading {
	for _, id := range src.metrics {
		if m := &s.metrics[id]; !m.born && m.live {
			out = append(out, s.end(id, at, stamped))
		}
	}
	return out
}

// end takes a metric's value away from an instant on, but behind its last.
func (s *Space) end(id int, at int64, stamped bool) Reading {
	m := &s.metrics[id]
	m.live = false
	return Reading{ID: id, At: max(at, m.newest+1), Value: math.NaN(), Mark: quality.Offline, Stamped: stamped}
}

// gone takes a source, and the values of its metrics, away.
func (s *Space) gone(src *source, at int64, stamped bool, out []Reading) []Reading {
	for _, id := range src.metrics {
		if s.metrics[id].live {
			out = append(out, s.end(id, at, stamped))
		}
	}
	if src.alive {
		src.alive = false
		out = s.tell(src, max(at, src.newest+1), 0, stamped, out)
	}
	return out
}

// nodeDeath takes a node away, at the receiver's time: its message was written when the
// node connected. One that belongs to an earlier session than the last birth is of no account.
func (s *Space) nodeDeath(n *node, out []Reading) ([]Reading, error) {
	bdSeq, pledged, err := s.survey()
	switch {
	case err != nil:
		return out, err
	case n.pledged && pledged && bdSeq != n.bdSeq:
		s.counts.LateDeaths++
		return out, nil
	}
	s.counts.Deaths++
	out = s.allGone(n, s.now(n), out)
	n.forget()
	n.pledged = false
	if s.requests != nil {
		s.requests.Cancel(n.Source)
	}
	return out, nil
}

func (s *Space) allGone(n *node, at int64, out []Reading) []Reading {
	for _, d := range n.devices {
		out = s.gone(d, at, false, out)
	}
	return s.gone(&n.source, at, false, out)
}

// agree is how far the clocks of a node and of the receiver may be apart and still count
// as one, ns; the figure is our own.
const agree = 2_000_000_000

// now is the receiver's time, and where the node's clock is far from it, that time by the
// node's clock: its end must not come before, or long after, its own last readings.
func (s *Space) now(n *node) int64 {
	if n.lag == math.MaxInt64 || (n.lag <= agree && n.lag >= -agree) {
		return s.arrival
	}
	return s.arrival - n.lag
}

// deviceDeath takes a device away when its node says so.
func (s *Space) deviceDeath(n *node, d *source, out []Reading) []Reading {
	s.counts.Deaths++
	at, stamped := s.sent()
	if !stamped {
		at = s.arrival
	}
	n.forgetDevice(d)
	d.born = false
	return s.gone(d, at, stamped, out)
}

// Lost appends to out that all is gone: the connection, by which it would be known, is
// lost at now. What the births have told holds on, as long as the sequence of the node
// goes on when it is heard again.
func (s *Space) Lost(now int64, out []Reading) []Reading {
	before := len(out)
	s.arrival = now
	for _, n := range s.nodes {
		out = s.allGone(n, s.now(n), out)
		n.doubtful = true
	}
	s.note(out[before:])
	return out
}
