package agent

import (
	"context"
	"errors"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/store"
)

// pointSpans are how long a point of a series may be, up to a day; longer ones are whole days.
var pointSpans = [...]time.Duration{
	time.Minute, 2 * time.Minute, 3 * time.Minute, 5 * time.Minute, 10 * time.Minute, 15 * time.Minute, 20 * time.Minute, 30 * time.Minute,
	time.Hour, 2 * time.Hour, 3 * time.Hour, 4 * time.Hour, 6 * time.Hour, 8 * time.Hour, 12 * time.Hour, 24 * time.Hour,
}

// pointSpan is the shortest length of a point, not below least, of which a time touches no more
// than so many: points begin at multiples of it, counted from 1970 by UTC.
func pointSpan(from, to int64, points int, least time.Duration) int64 {
	for _, s := range pointSpans {
		if s >= least && pointsIn(from, to, int64(s)) <= int64(points) {
			return int64(s)
		}
	}
	const day = 24 * hour
	days := int64(2)
	for pointsIn(from, to, days*day) > int64(points) {
		days++
	}
	return days * day
}

func pointsIn(from, to, span int64) int64 { return (floorTo(to-1, span)-floorTo(from, span))/span + 1 }

// floorTo is the greatest multiple of step up to t.
func floorTo(t, step int64) int64 { return t - (t%step+step)%step }

// series answers q: the records of a load, thinned to points so that the least and the greatest
// duty of their minutes are kept. Points are made from minutes; where they are an hour or longer,
// from hours. They are an hour at least where any hour has lost some of its minutes, or they
// cannot be read.
func (h *history) series(ctx context.Context, q answer.SeriesQuery) (*answer.Series, error) {
	if err := q.Check(); err != nil {
		return nil, err
	}
	zone, err := placeOf(q.Zone, h.zone)
	if err != nil {
		return nil, err
	}
	accounted := floorTo(h.through(), minute)
	from, to, err := seriesBounds(q, zone, accounted)
	if err != nil {
		return nil, err
	}
	ids, err := h.db.Names("load")
	if err != nil {
		return nil, err
	}
	if _, err := choose(ids, []string{q.Load}); err != nil {
		return nil, err
	}
	s := &seriesSource{db: h.db, load: ids[q.Load], from: floorTo(from, minute), to: -floorTo(-to, minute), until: accounted}
	if q.Points == 0 {
		q.Points = answer.UsualPoints
	}
	t, err := s.thinned(ctx, q.Points)
	if err != nil {
		return nil, err
	}
	at := func(ns int64) time.Time { return time.Unix(0, ns).In(zone) }
	out := t.columns()
	out.Load, out.Zone, out.From, out.To, out.Accounted, out.Unused = q.Load, zone.String(), at(from), at(to), at(accounted), s.unused
	return out, nil
}

// seriesBounds is the time that q asks for; it is empty where the history has not come to its
// beginning and no end is given.
func seriesBounds(q answer.SeriesQuery, zone *time.Location, accounted int64) (from, to int64, err error) {
	if from, err = account.Moment(q.From, zone); err != nil {
		return 0, 0, answer.Wrongf("from %v", err)
	}
	if q.To == "" {
		return from, max(from, accounted), nil
	}
	if to, err = account.Moment(q.To, zone); err != nil {
		return 0, 0, answer.Wrongf("to %v", err)
	}
	if from >= to {
		return 0, 0, answer.Wrongf("to %s is not after from %s", q.To, q.From)
	}
	return from, to, nil
}

// seriesSource reads the records of one load for a series.
type seriesSource struct {
	db       *store.Store
	load     uint32
	from, to int64 // whole minutes
	until    int64 // how far the history goes
	unused   int   // damaged records
}

// thinned reads all into at most so many points.
func (s *seriesSource) thinned(ctx context.Context, points int) (*thinning, error) {
	if span := pointSpan(s.from, s.to, points, time.Minute); span < hour {
		t := newThinning(s.from, min(s.to, s.until), span)
		if whole, err := s.minutes(ctx, t); whole || err != nil {
			return t, err
		}
		s.unused = 0
	}
	t := newThinning(s.from, min(s.to, s.until), pointSpan(s.from, s.to, points, time.Hour))
	return t, s.hours(ctx, t)
}

// minutes reads the minutes, and tells whether the hours have no more than there are.
func (s *seriesSource) minutes(ctx context.Context, t *thinning) (whole bool, err error) {
	first, end := floorTo(s.from, hour), -floorTo(-s.to, hour)
	lacking := map[int64]int{} // minutes, by the start of the hour; hours come first, for what is committed meanwhile
	for h, err := range s.db.Hours(s.load, first, end) {
		if stop := s.stop(ctx, nil, err); stop != nil {
			return false, stop
		}
		lacking[h.Start] += int(h.Minutes)
	}
	for m, err := range s.db.Minutes(s.load, first, end) {
		if stop := s.stop(ctx, &s.unused, err); stop != nil {
			return false, stop
		}
		if err != nil {
			continue
		}
		lacking[floorTo(m.Start, hour)]--
		if s.wants(m.Start) {
			t.minute(&m)
		}
	}
	for _, n := range lacking {
		if n > 0 {
			return false, nil
		}
	}
	return true, nil
}

// hours reads the hours, and of those that reach over the ends the minutes, where all are left.
func (s *seriesSource) hours(ctx context.Context, t *thinning) error {
	for h, err := range s.db.Hours(s.load, floorTo(s.from, hour), s.to) {
		if stop := s.stop(ctx, &s.unused, err); stop != nil {
			return stop
		}
		switch {
		case err != nil:
		case s.wants(h.Start) && h.Start+hour <= s.to:
			t.hour(&h)
		default:
			if err := s.edge(ctx, &h, t); err != nil {
				return err
			}
		}
	}
	return nil
}

// edge reads an hour of which a part is wanted.
func (s *seriesSource) edge(ctx context.Context, h *store.Hour, t *thinning) error {
	var found []store.Minute
	for m, err := range s.db.Minutes(s.load, h.Start, h.Start+hour) {
		if stop := s.stop(ctx, nil, err); stop != nil {
			return stop
		}
		if err == nil {
			found = append(found, m)
		}
	}
	if len(found) < int(h.Minutes) {
		t.hour(h)
		return nil
	}
	for i := range found {
		if s.wants(found[i].Start) {
			t.minute(&found[i])
		}
	}
	return nil
}

func (s *seriesSource) wants(start int64) bool { return start >= s.from && start < s.to }

// stop is why no more can be read; a damaged record is counted in unused, where it is given.
func (s *seriesSource) stop(ctx context.Context, unused *int, err error) error {
	switch {
	case ctx.Err() != nil:
		return ctx.Err()
	case errors.Is(err, store.ErrDamaged):
		if unused != nil {
			*unused++
		}
		return nil
	}
	return err
}
