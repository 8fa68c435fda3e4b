package agent

import (
	"context"
	"math"
	"slices"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/store"
)

// pointSpans are how long a point of a series may be, up to a day; longer ones are whole days.
var pointSpans = [...]time.Duration{
	time.Minute, 2 * time.Minute, 5 * time.Minute, 10 * time.Minute, 15 * time.Minute, 20 * time.Minute, 30 * time.Minute,
	time.Hour, 2 * time.Hour, 3 * time.Hour, 4 * time.Hour, 6 * time.Hour, 8 * time.Hour, 12 * time.Hour, 24 * time.Hour,
}

// pointSpan is the shortest by which a time has no more than so many points, wherever on the
// grid of points it begins.
func pointSpan(from, to int64, points int) int64 {
	for _, s := range pointSpans {
		if pointsIn(from, to, int64(s)) <= int64(points) {
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

func pointsIn(from, to, span int64) int64 { return (to-1)/span - from/span + 1 }

// series answers q: a load's records, thinned so that the least and the greatest duty of their
// minutes are kept. It is made from minutes, and from hours where points are as long, or where
// the minutes of the first hours are not left; points are then an hour at least.
func (h *history) series(ctx context.Context, q answer.SeriesQuery) (*answer.Series, error) {
	zone, err := placeOf(q.Zone, h.zone)
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
	from, to, err := h.seriesSpan(q, zone)
	if err != nil {
		return nil, err
	}
	points := q.Points
	if points == 0 {
		points = answer.UsualPoints
	}
	id, span := ids[q.Load], pointSpan(from, to, points)
	if span < hour && h.minutesGone(id, from, to) {
		span = pointSpan(from, to, min(points, int(pointsIn(from, to, hour))))
	}
	t := &thinning{span: span, at: from - from%span - span}
	if span < hour {
		err = readSeries(ctx, h.db.Minutes(id, from, to), minuteSample, t)
	} else {
		err = readSeries(ctx, h.db.Hours(id, hourOf(from), to), hourSample, t)
	}
	if err != nil {
		return nil, err
	}
	t.close()
	at := func(ns int64) time.Time { return time.Unix(0, ns).In(zone) }
	s := &t.out
	s.Load, s.Zone, s.From, s.To, s.Accounted, s.Span = q.Load, zone.String(), at(from), at(to), at(h.through()-h.through()%minute), float64(span)/1e9
	if s.Start == nil { // an empty array, and not null
		t.empty()
	}
	return s, nil
}

// seriesSpan is the time that q asks for.
func (h *history) seriesSpan(q answer.SeriesQuery, zone *time.Location) (from, to int64, err error) {
	if from, err = account.Moment(q.From, zone); err != nil {
		return 0, 0, answer.Wrongf("from %v", err)
	}
	to = h.through() - h.through()%minute
	if q.To != "" {
		if to, err = account.Moment(q.To, zone); err != nil {
			return 0, 0, answer.Wrongf("to %v", err)
		}
	}
	if from >= to {
		return 0, 0, answer.Wrongf("to %s is not after from %s", time.Unix(0, to).In(zone).Format(time.RFC3339), q.From)
	}
	return from, to, nil
}

// minutesGone tells whether the first hour that has something measured has lost its minutes.
func (h *history) minutesGone(id uint32, from, to int64) bool {
	for x, err := range h.db.Hours(id, hourOf(from), to) {
		if err != nil || x.Measured == 0 {
			continue
		}
		for range h.db.Minutes(id, x.Start, x.Start+hour) {
			return false
		}
		return true
	}
	return false
}

// readSeries puts records through the thinning. Damaged ones are missing in it.
func readSeries[R any](ctx context.Context, records func(func(R, error) bool), of func(*R) sample, t *thinning) error {
	for r, err := range records {
		switch {
		case ctx.Err() != nil:
			return ctx.Err()
		case err == nil:
			x := of(&r)
			t.add(&x)
		}
	}
	return nil
}

// sample is what a record has for a series.
type sample struct {
	start                             int64
	measured, bridged                 float64
	given, taken, duty, lowest, most  float64
	uncertainty, inlet, outlet, flow  float64
	expected, expectedU, expectedOver float64 // the last is the time for which something was expected
}

func minuteSample(m *store.Minute) sample {
	return sample{
		start: m.Start, measured: m.Measured, bridged: m.Bridged, given: m.Given, taken: m.Taken,
		duty: m.Duty, lowest: m.DutyMin, most: m.DutyMax, uncertainty: m.DutyUncertainty, inlet: m.Inlet, outlet: m.Outlet, flow: m.Flow,
	}
}

func hourSample(h *store.Hour) sample {
	x := sample{
		start: h.Start, measured: h.Measured, bridged: h.Bridged, given: h.Given, taken: h.Taken,
		duty: h.Duty, lowest: h.DutyMin, most: h.DutyMax, inlet: h.Inlet, outlet: h.Outlet,
	}
	if h.Measured > 0 {
		x.flow, x.uncertainty = h.Mass/h.Measured, h.HeatUncertainty/h.Measured
	}
	return x
}

// thinning makes points of samples that come in the order of time.
type thinning struct {
	span, at int64 // of the point in the making
	any      bool
	p        point
	out      answer.Series
}

// point adds samples up, each by its measured time.
type point struct {
	measured, bridged, given, taken float64
	duty, uncertainty, flow         float64 // times time
	inlet, outlet                   weighed
	expected, expectedU             weighed
	lowest, most                    float64
}

// weighed is a mean over the time in which there was a value.
type weighed struct{ sum, over float64 }

func (w *weighed) add(x, over float64) {
	if x != 0 {
		w.sum, w.over = w.sum+x*over, w.over+over
	}
}

func (w *weighed) mean() *float64 {
	if w.over == 0 {
		return nil
	}
	return finite(w.sum / w.over)
}

// finite is nil for what JSON has no number for.
func finite(x float64) *float64 {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	return &x
}

func (t *thinning) add(x *sample) {
	if at := x.start - x.start%t.span; at != t.at {
		t.close()
		t.at, t.p = at, point{lowest: math.Inf(1), most: math.Inf(-1)}
	}
	t.any = true
	p, over := &t.p, x.measured
	p.measured, p.bridged = p.measured+over, p.bridged+x.bridged
	p.given, p.taken = p.given+x.given, p.taken+x.taken
	if over == 0 {
		return
	}
	p.duty, p.uncertainty, p.flow = p.duty+x.duty*over, p.uncertainty+x.uncertainty*over, p.flow+x.flow*over
	p.inlet.add(x.inlet, over)
	p.outlet.add(x.outlet, over)
	p.expected.add(x.expected, x.expectedOver)
	p.expectedU.add(x.expectedU, x.expectedOver)
	p.lowest, p.most = min(p.lowest, x.lowest), max(p.most, x.most)
}

// close puts the point out. What lasts does not average out of it, so the uncertainty of its
// mean is at most the mean of the uncertainties, and told as that.
func (t *thinning) close() {
	if !t.any {
		return
	}
	t.any = false
	p, s := &t.p, &t.out
	s.Start = append(s.Start, t.at/1e9)
	s.Measured, s.Bridged = append(s.Measured, p.measured), append(s.Bridged, p.bridged)
	s.Given, s.Taken = append(s.Given, p.given), append(s.Taken, p.taken)
	over := func(x float64) *float64 {
		if p.measured == 0 {
			return nil
		}
		return finite(x)
	}
	s.Mean, s.Uncertainty = append(s.Mean, over(p.duty/p.measured)), append(s.Uncertainty, over(p.uncertainty/p.measured))
	s.Flow = append(s.Flow, over(p.flow/p.measured))
	s.Lowest, s.Highest = append(s.Lowest, over(p.lowest)), append(s.Highest, over(p.most))
	s.Inlet, s.Outlet = append(s.Inlet, p.inlet.mean()), append(s.Outlet, p.outlet.mean())
	s.Expected, s.ExpectedU = append(s.Expected, p.expected.mean()), append(s.ExpectedU, p.expectedU.mean())
}

// empty gives all columns no element.
func (t *thinning) empty() {
	s := &t.out
	s.Start = []int64{}
	for _, column := range [...]*[]*float64{&s.Lowest, &s.Highest, &s.Mean, &s.Uncertainty, &s.Expected, &s.ExpectedU, &s.Inlet, &s.Outlet, &s.Flow} {
		*column = []*float64{}
	}
	for _, column := range [...]*[]float64{&s.Measured, &s.Bridged, &s.Given, &s.Taken} {
		*column = slices.Clone([]float64{})
	}
}
