package page

import (
	"context"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
	"heatreeve/thermo/unit"
)

// coursePart tells the course of a load over the span of the address: charts that the browser
// draws, and what they come to.
type coursePart struct {
	Fault         string
	Data          string // address of the columns, SI
	Live          bool
	Seconds       int64  // of the span
	Minute        string // address of the sheet, without the minute whose working is told
	Zone          string
	From, To      string
	Duty          scale
	Temperature   scale
	Flow          scale
	Allow         float64 // fraction of what is expected
	Expects       bool
	Serves        string // gives or takes heat
	Stream        bool   // there are an inlet, an outlet and a flow
	Rows          []courseRow
	Measured      string // of the time, per cent
	Bridged       string
	Missing       string
	Spans, Ways   []link
	PointsMinutes string
}

// courseRow is a quantity over the span.
type courseRow struct {
	Name, Lowest, Mean, Highest, Spread, Unit string
}

// seriesPath is where the columns of a course are served.
const seriesPath = "/api/v1/series"

// coursePoints is how many points a chart has, at most.
const coursePoints = 800

func (s *loadSheet) course(ctx context.Context) *coursePart {
	begin, end := s.address.begin(s.now), s.address.end(s.now)
	q := answer.SeriesQuery{Load: s.load.Name, From: begin.Format(addressMinute), Points: coursePoints}
	if !s.address.live() {
		q.To = end.Format(addressMinute)
	}
	p := &coursePart{
		Data: seriesPath + "?" + q.Values().Encode(), Live: s.address.live(), Seconds: int64(end.Sub(begin) / time.Second),
		Minute: s.address.minute(time.Time{}).link(""), Zone: s.zone.String(), From: s.clock(begin), To: s.clock(end),
		Allow: s.load.Design.Allow, Serves: s.serves, Stream: s.load.Stream != nil, Expects: s.expects(), Spans: s.address.spanLinks(), Ways: s.address.stepLinks(s.now),
	}
	x, err := s.source.Series(ctx, q)
	if err != nil {
		p.Fault = why(err)
		x = &answer.Series{}
	}
	s.scales(p, x)
	if err == nil {
		p.Rows = s.rows(x)
		p.coverage(x, begin, end)
		p.PointsMinutes = duration(time.Duration(x.Span) * time.Second)
	}
	return p
}

// scales fills in units and digits.
func (s *loadSheet) scales(p *coursePart, x *answer.Series) {
	u := s.units
	mean, _ := average(x.Mean, x.Measured)
	p.Duty = scaleOf(u.Duty, mean, s.dutySpread(x))
	inlet, _ := average(x.Inlet, x.Measured)
	p.Temperature = scaleOf(u.Temperature, inlet, s.inletSpread(inlet))
	flow, _ := average(x.Flow, x.Measured)
	p.Flow = scaleOf(u.Flow, flow, s.flowSpread(flow))
}

// dutySpread is the expanded uncertainty of the duty over the course, or that of the newest figure
// where the course has none.
func (s *loadSheet) dutySpread(x *answer.Series) float64 {
	if mean, ok := average(x.Uncertainty, x.Measured); ok {
		return answer.CoverageFactor * mean
	}
	return answer.CoverageFactor * s.figure.Uncertainty
}

// inletSpread and outletSpread are expanded uncertainties by the thermometers; a vessel has one.
func (s *loadSheet) inletSpread(T float64) float64 {
	if q := s.load.Stream; q != nil {
		return accuracy(s.site, q.Inlet, T)
	}
	return accuracy(s.site, s.load.Vessel.Temperature, T)
}

func (s *loadSheet) outletSpread(T float64) float64 {
	if q := s.load.Stream; q != nil {
		return accuracy(s.site, q.Outlet, T)
	}
	return accuracy(s.site, s.load.Vessel.Temperature, T)
}

func (s *loadSheet) flowSpread(m float64) float64 {
	if s.load.Stream == nil {
		return 0
	}
	return flowAccuracy(s.site, s.load.Stream, s.density(), m)
}

// density is that of the newest figure, or that of the design point where there is none; 0 where
// the file has neither.
func (s *loadSheet) density() float64 {
	if s.figure.Density > 0 {
		return s.figure.Density
	}
	at, err := s.load.Stream.Fluid.At(s.load.Design.Inlet, s.pressure())
	if err != nil {
		return 0
	}
	return at.Density
}

// rows are the quantities that the course has.
func (s *loadSheet) rows(x *answer.Series) (all []courseRow) {
	add := func(name string, u unit.Unit, low, mean, high []*float64, spread func(float64) float64) {
		m, ok := average(mean, x.Measured)
		if !ok {
			return
		}
		lo, _ := extent(low)
		_, hi := extent(high)
		all = append(all, rowOf(name, u, lo, m, hi, spread(m)))
	}
	add("duty", s.units.Duty, x.Lowest, x.Mean, x.Highest, func(float64) float64 { return s.dutySpread(x) })
	add("expected duty", s.units.Duty, x.Expected, x.Expected, x.Expected, func(float64) float64 {
		u, _ := average(x.ExpectedU, x.Measured)
		if u == 0 {
			return s.dutySpread(x) // no digit more than the duty that it is held against
		}
		return answer.CoverageFactor * u
	})
	add("inlet", s.units.Temperature, x.Inlet, x.Inlet, x.Inlet, s.inletSpread)
	add("outlet", s.units.Temperature, x.Outlet, x.Outlet, x.Outlet, s.outletSpread)
	add("mass flow", s.units.Flow, x.Flow, x.Flow, x.Flow, s.flowSpread)
	return all
}

func rowOf(name string, u unit.Unit, lo, mean, hi, expanded float64) courseRow {
	r := courseRow{Name: name, Unit: shown.Label(u)}
	r.Lowest, _ = shown.Figure(u, lo, expanded)
	r.Mean, r.Spread = shown.Figure(u, mean, expanded)
	r.Highest, _ = shown.Figure(u, hi, expanded)
	return r
}

// coverage tells how much of the time from begin to end was measured, as far as the history goes.
func (p *coursePart) coverage(x *answer.Series, begin, end time.Time) {
	if x.Accounted.Before(end) {
		end = x.Accounted
	}
	var measured, bridged float64
	for i := range x.Measured {
		measured += x.Measured[i]
	}
	for i := range x.Bridged {
		bridged += x.Bridged[i]
	}
	all := max(end.Sub(begin).Seconds(), measured+bridged, 1)
	p.Measured, p.Bridged = coverageText(measured/all), percentText(bridged/all)
	p.Missing = percentText(max(0, all-measured-bridged) / all)
}

// expects tells whether the load has a design.
func (s *loadSheet) expects() bool {
	d := &s.load.Design
	return d.Duty != 0 || d.Table != nil || d.Week != nil || d.Baseline != nil || d.Exchanger != ""
}
