package loads

import (
	"math"

	"heatreeve/ingest/quality"
)

// beyond is how many standard uncertainties a difference must be for it to be one.
const beyond = 2

// enlistBesides notes which sensors stand beside each other, either way.
func (e *Engine) enlistBesides() {
	for i := range e.cfg.Tags {
		if t := &e.cfg.Tags[i]; t.HasBeside {
			if e.besides == nil {
				e.besides = make([][]int, len(e.tags))
			}
			e.besides[i] = append(e.besides[i], t.Beside)
			e.besides[t.Beside] = append(e.besides[t.Beside], i)
		}
	}
}

// standsAt reports whether what the tag holds may be used at the instant of f, which must be
// worked anew once it has run out of age.
func (e *Engine) standsAt(tag int, f *Figure) bool {
	h, t := &e.tags[tag].Held, &e.cfg.Tags[tag]
	switch {
	case !h.Has || h.bad():
		return false
	case t.OnChange:
		return e.standing(tag, f.At) == holds
	case f.At-h.At >= t.MaxAge:
		return false
	}
	f.Until = min(f.Until, after(h.At, t.MaxAge))
	return true
}

// variance is that of what a tag holds, by all that may be wrong with it.
func (e *Engine) variance(tag int) float64 {
	t := &e.tags[tag]
	d := e.cfg.Tags[tag].doubt(t.Held.Value, &t.Scatter)
	return d.variance()
}

func (d *doubt) variance() float64 { return d.accuracy*d.accuracy + d.coarse + d.scatter }

// compare marks f, which uses a tag, where a sensor beside it tells something else:
//
//	|x1 − x2| > 2·√(u1² + u2²)
//
// Which of them is wrong no one knows. Where no uncertainty is stated there is nothing to
// compare with.
func (e *Engine) compare(f *Figure, tag int) {
	for _, other := range e.besides[tag] {
		if !e.standsAt(other, f) {
			continue
		}
		apart, u := math.Abs(e.tags[tag].Held.Value-e.tags[other].Held.Value), math.Sqrt(e.variance(tag)+e.variance(other))
		if u > 0 && apart > beyond*u {
			f.mark(quality.Disagrees, e.cfg.Tags[tag].Name)
		}
	}
}

// pumped marks the figure of a stream that flows while its pump stands. Right after a stop
// it does for as long as the last reading of the flow is held.
func (e *Engine) pumped(load int, f *Figure, s *steps) {
	l := &e.cfg.Loads[load]
	if !l.HasRunning || l.Stream.Flow.Tag < 0 || !e.standsAt(l.Running.Tag, f) {
		return
	}
	if e.tags[l.Running.Tag].Held.Value == 0 && math.Abs(s.x.Flow) > beyond*math.Sqrt(s.d[PartFlow].variance()) {
		f.mark(quality.NotZero, e.nameOf(l.Stream.Flow))
	}
}

// BypassOpen is the least part of its way at which a bypass takes all of a flow: common practice, no
// source.
const BypassOpen = 0.95

// opened is since when a bypass has been open, with its reading s next to what t holds; 0 where
// it is not, or what it reads is not to be used. It begins anew after a time without a reading.
func (t *tagState) opened(s *sample, maxAge int64) int64 {
	switch h := &t.Held; {
	case s.bad() || s.Value < BypassOpen:
		return 0
	case t.Open == 0 || t.Lapse > h.At || maxAge > 0 && s.At-h.At >= maxAge:
		return s.At
	}
	return t.Open
}

// alike marks the measured figure of a stream that flows past its load with its ends apart, by
// more than twice the standard uncertainty of their difference, where there is nothing to make them so.
func (e *Engine) alike(load int, f *Figure, s *steps) {
	l, q := &e.cfg.Loads[load], &e.equations[load]
	if !l.HasBypass || !f.Measured() || q.Inlet.Tag < 0 || q.Outlet.Tag < 0 || !e.standsAt(l.Bypass.Tag, f) {
		return
	}
	since := e.tags[l.Bypass.Tag].Open
	if since == 0 {
		return
	}
	if settled := since + l.Settles; f.At < settled {
		f.Until = min(f.Until, settled)
		return
	}
	if u := q.apart(s); u > 0 && math.Abs(s.x.Outlet-s.x.Inlet) > beyond*u {
		f.mark(quality.NotZero, e.nameOf(q.Outlet))
	}
}

// apart is the standard uncertainty of the difference between the ends:
//
//	u = √(uI² + uO² − 2·r·uI·uO)
//
// where r is the correlation of a matched pair's accuracies.
func (q *equation) apart(s *steps) float64 {
	in, out := &s.d[PartInlet], &s.d[PartOutlet]
	return math.Sqrt(in.variance() + out.variance() - 2*q.Pair*in.accuracy*out.accuracy)
}

// order marks the measured figure of a stream that flows with its warmer end on the wrong
// side, by more than twice the standard uncertainty of their difference. Where one of the
// temperatures is a constant, or no uncertainty is stated, nothing is expected.
func (e *Engine) order(load int, f *Figure, s *steps) {
	q := &e.equations[load]
	if !f.Measured() || q.BothWays || q.Inlet.Tag < 0 || q.Outlet.Tag < 0 {
		return
	}
	wrong := s.x.Outlet - s.x.Inlet
	if !q.Gives {
		wrong = -wrong
	}
	if u := q.apart(s); u > 0 && wrong > beyond*u {
		f.mark(quality.WrongOrder, e.nameOf(q.Outlet))
	}
}
