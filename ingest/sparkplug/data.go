package sparkplug

import (
	"math"

	"heatreeve/ingest/quality"
)

// data reads the metrics of a message of data.
func (s *Space) data(n *node, src *source, out []Reading) ([]Reading, error) {
	if !src.born {
		s.counts.Unborn++
		s.ask(n)
	}
	for m := &s.at; ; {
		ok, err := s.payload.Next(m)
		if err != nil {
			return out, err
		}
		if !ok {
			return s.living(src, out), nil
		}
		id, datatype := s.known(n, src, m)
		if id >= 0 {
			out = append(out, s.reading(src, id, datatype, false))
		}
	}
}

// known finds the number and the datatype of the metric at hand. By its name it is found
// without a birth as well; by its alias only as long as the birth that told it holds.
func (s *Space) known(n *node, src *source, m *Metric) (id int, d Datatype) {
	if m.Name != nil {
		id = s.o.Want(src.Source, m.Name)
		if id < 0 {
			return id, Unknown
		}
		if d = m.Datatype; d == Unknown && src.born {
			if w := s.metric(id, src); w.born {
				d = w.datatype
			}
		}
		return id, d
	}
	a, ok := n.aliases[m.Alias]
	if !m.Aliased || !ok || a.of != src {
		s.counts.UnknownAlias++
		s.ask(n)
		return -1, Unknown
	}
	return a.id, a.datatype
}

// reading is what the metric at hand says. A value in a birth, and the first after its
// metric was gone, is that of now, however long ago it was acquired: it stands from when
// the message was sent, and at the earliest from when the metric was gone.
func (s *Space) reading(src *source, id int, d Datatype, birth bool) Reading {
	m, p, w := &s.at, &s.payload, s.metric(id, src)
	if s.o.Told != nil {
		texts(m.properties, func(key, text []byte) { s.o.Told(id, key, text) })
	}
	r := Reading{ID: id, Mark: m.mark(), Historical: m.Historical, Datatype: d, Stamped: m.Stamped, Stamp: m.Timestamp}
	if !m.Historical && p.Stamped && (!m.Stamped || (birth || !w.live) && p.Timestamp > m.Timestamp) {
		r.Stamped, r.Stamp = true, p.Timestamp
	}
	r.Value, r.Wrong = m.number(d)
	r.Truth = m.field == fieldBool
	if r.Mark.Quality() == quality.Bad {
		if r.Wrong != Right || m.Null {
			r.Value = math.NaN()
		}
		r.Wrong = Right
	}
	if m.Transient {
		r.Wrong = Transient
	}
	at, when := s.instant(&r)
	switch {
	case r.Wrong == Right:
		r.At, r.Wrong = at, when
	case when == Right:
		r.At = at
	default:
		return r
	}
	if when == Right && !r.Historical && !w.live {
		r.At = max(r.At, w.newest+1)
	}
	return r
}

// instant is when a reading stands: as stamped, else at its arrival.
func (s *Space) instant(r *Reading) (int64, Wrong) {
	switch {
	case !r.Stamped && r.Historical:
		return 0, Undated
	case !r.Stamped:
		return s.arrival, Right
	case r.Stamp > math.MaxInt64/1_000_000:
		return 0, NoInstant
	}
	at := int64(r.Stamp) * 1_000_000
	switch {
	case at < s.o.Earliest:
		return at, UnsetClock
	case at > s.arrival && at-s.arrival > s.o.Ahead:
		return at, Ahead
	}
	return at, Right
}

// sent is when the message at hand says that it was sent; ok is false where it does not, or
// not in earnest.
func (s *Space) sent() (at int64, ok bool) {
	r := Reading{Stamped: s.payload.Stamped, Stamp: s.payload.Timestamp}
	at, wrong := s.instant(&r)
	return at, wrong == Right && r.Stamped
}

// clock notes how far the node's clock is behind.
func (s *Space) clock(n *node) {
	if at, ok := s.sent(); ok {
		n.lag = min(n.lag, s.arrival-at)
	}
}

// living tells that a source is alive, once until it is gone.
func (s *Space) living(src *source, out []Reading) []Reading {
	if src.alive {
		return out
	}
	src.alive = true
	at, stamped := s.sent()
	if !stamped {
		at = s.arrival
	}
	return s.tell(src, max(at, src.newest+1), 1, stamped, out)
}

// tell says whether a source is alive, to a user who wants to know.
func (s *Space) tell(src *source, at int64, value float64, stamped bool, out []Reading) []Reading {
	src.newest = at
	if src.id < 0 {
		return out
	}
	return append(out, Reading{ID: src.id, At: at, Value: value, Stamped: stamped})
}
