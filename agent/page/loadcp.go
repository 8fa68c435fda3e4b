package page

import (
	"context"
	"math"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
	"heatreeve/agent/site"
	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// cpPart tells the specific heat of a load's fluid over temperature.
type cpPart struct {
	Fault    string
	Fluid    string
	Source   string
	Pressure string
	Day      string // whose operating span is marked
	Curve    *curve
	Rows     []cpRow
	Idle     bool // the day has no operating span
}

// cpRow is the specific heat at one temperature, or why the fluid has none there.
type cpRow struct{ Where, Temperature, Cp, Refused string }

// cpPoints is how many points a curve has.
const cpPoints = 49

// usualPressure stands where a load tells none, Pa.
const usualPressure = 101325

// leastMargin is how far the curve goes beyond the operating span at least, K.
const leastMargin = 15

func (s *loadSheet) cp(ctx context.Context) *cpPart {
	name, f := s.load.Fluid()
	p := &cpPart{Fluid: name, Source: f.Source()}
	if f.Name() != name {
		p.Source = name + " is " + f.Name() + ". " + p.Source
	}
	pressure := s.pressure()
	p.Pressure = s.pressureText(pressure)
	lo, hi, day, err := s.operating(ctx)
	p.Day = day
	if err != nil {
		p.Fault = why(err)
	}
	p.Idle = err == nil && math.IsNaN(lo)
	from, to := cpSpan(f, pressure, lo, hi)
	ts, cps, us, err := cpCurve(f, pressure, from, to)
	if len(ts) < 2 {
		p.Fault = why(err)
		return p
	}
	s.drawCp(p, ts, cps, us, lo, hi)
	s.cpRows(p, f, pressure, lo, hi)
	return p
}

// pressure is the one that the curve is for, Pa: that of the newest figure, or else of the file,
// fixed or of its design.
func (s *loadSheet) pressure() float64 {
	if s.figure.Pressure > 0 {
		return s.figure.Pressure
	}
	from := site.Source{Tag: 0}
	switch {
	case s.load.Stream != nil:
		from = s.load.Stream.Pressure
	case s.load.Vessel != nil:
		from = s.load.Vessel.Pressure
	}
	switch {
	case from.Constant() && from.Value > 0:
		return from.Value
	case s.load.Design.Pressure > 0:
		return s.load.Design.Pressure
	}
	return usualPressure
}

// pressureText writes a pressure beside the temperatures that the reader chose.
func (s *loadSheet) pressureText(p float64) string {
	if s.fahrenheit() {
		return fourDigits(p/poundsPerSquareInch) + " psi absolute"
	}
	return fourDigits(p/1e5) + " bar absolute"
}

// poundsPerSquareInch is one, Pa (NIST SP 811, appendix B.8).
const poundsPerSquareInch = 6894.757

func (s *loadSheet) fahrenheit() bool { return s.units.Temperature.Symbol == "°F" }

// operating are the least and the greatest temperature of the day up to the end of the address;
// NaN where it has none. Of a vessel it is the temperature now, since no others are kept.
func (s *loadSheet) operating(ctx context.Context) (lo, hi float64, day string, err error) {
	if s.load.Vessel != nil {
		T := math.NaN()
		if s.figure.Measured() && s.figure.Content > 0 {
			T = s.figure.Content
		}
		return T, T, "now", nil
	}
	end := s.address.end(s.now).In(s.zone)
	begin := floor(end.Add(-time.Minute), "day")
	q := answer.SeriesQuery{Load: s.load.Name, From: periodText(begin, "day"), Points: 288}
	day = "today"
	if !s.address.live() {
		q.To, day = end.Format(addressMinute), begin.Format("on Mon 2 Jan 2006")
	}
	x, err := s.source.Series(ctx, q)
	if err != nil {
		return math.NaN(), math.NaN(), day, err
	}
	lo, hi = extent(x.Inlet)
	lo2, hi2 := extent(x.Outlet)
	return lesser(lo, lo2), -lesser(-hi, -hi2), day, nil
}

// lesser is the lesser of two, of which a NaN is none.
func lesser(a, b float64) float64 {
	if math.IsNaN(a) || b < a {
		return b
	}
	return a
}

// cpSpan are the temperatures of the curve: the operating span with as much again around it, as
// far as the fluid is in its one phase; without one, all that the fluid knows.
func cpSpan(f thermo.Fluid, p, lo, hi float64) (from, to float64) {
	b := f.Bounds()
	least, most := f.Span(p)
	from, to = max(b.MinT, least), min(b.MaxT, most)
	if math.IsNaN(lo) {
		return from, to
	}
	margin := max(leastMargin, (hi-lo)/2)
	if near, far := max(from, lo-margin), min(to, hi+margin); near < far {
		return near, far
	}
	return from, to
}

// cpCurve are points of cp with its expanded uncertainty; where the fluid refuses one it is left
// out, and the error is the last of these.
func cpCurve(f thermo.Fluid, p, from, to float64) (ts, cps, us []float64, refused error) {
	for i := range cpPoints {
		T := from + (to-from)*float64(i)/(cpPoints-1)
		x, err := f.At(T, p)
		if err != nil {
			refused = err
			continue
		}
		relative, _ := f.Uncertainty(T, p)
		ts, cps, us = append(ts, T), append(cps, x.Cp), append(us, answer.CoverageFactor*relative*x.Cp)
	}
	return ts, cps, us, refused
}

func (s *loadSheet) cpUnit() unit.Unit {
	name := "J/(kg K)"
	if s.fahrenheit() {
		name = "Btu/(lb °F)"
	}
	u, err := unit.LookupAs(name, unit.SpecificHeat)
	if err != nil {
		panic(err) // the name is one of the table's
	}
	return u
}

func (s *loadSheet) drawCp(p *cpPart, ts, cps, us []float64, lo, hi float64) {
	t, u := s.units.Temperature, s.cpUnit()
	xs, ys, upper, lower := inUnits(t, ts), inUnits(u, cps), make([]float64, len(cps)), make([]float64, len(cps))
	for i := range cps {
		upper[i], lower[i] = u.Of(cps[i]+us[i]), u.Of(cps[i]-us[i])
	}
	marks := roundAxis(xs[0], xs[len(xs)-1], 5)
	x := axis{From: xs[0], To: xs[len(xs)-1]}
	y := roundAxis(bounds(append(append([]float64{}, upper...), lower...)))
	c := drawCurve("specific heat over temperature; the figures are in the table below", x, y, xs, ys)
	c.Band = bandPath(places(x, xs), heights(y, upper), heights(y, lower))
	c.Below = within(x, marks.Marks, func(m float64) string { return shown.Rounded(m, marks.Decimals) })
	c.Of, c.Unit, c.Along = "specific heat", shown.Label(u), "temperature, "+shown.Label(t)
	if !math.IsNaN(lo) {
		c.Zones = []zone{stretch(x, t.Of(lo), t.Of(hi), p.Day)}
	}
	p.Curve = c
}

func inUnits(u unit.Unit, si []float64) []float64 {
	all := make([]float64, len(si))
	for i := range si {
		all[i] = u.Of(si[i])
	}
	return all
}

// endSpread is the expanded uncertainty of a temperature of which it is not known whether it is
// that of the inlet or of the outlet.
func (s *loadSheet) endSpread(T float64) float64 { return max(s.inletSpread(T), s.outletSpread(T)) }

// cpRows are the figures at the ends of the operating span.
func (s *loadSheet) cpRows(p *cpPart, f thermo.Fluid, pressure, lo, hi float64) {
	ends := []struct {
		where string
		T     float64
	}{{"coldest " + p.Day, lo}, {"warmest " + p.Day, hi}}
	switch {
	case math.IsNaN(lo):
		return
	case lo == hi:
		ends = ends[:1]
		ends[0].where = p.Day
	}
	for _, x := range ends {
		at, err := f.At(x.T, pressure)
		if err != nil {
			p.Rows = append(p.Rows, cpRow{Where: x.where, Temperature: told(s.units.Temperature, x.T, s.endSpread(x.T)), Refused: err.Error()})
			continue
		}
		relative, _ := f.Uncertainty(x.T, pressure)
		p.Rows = append(p.Rows, cpRow{Where: x.where, Temperature: told(s.units.Temperature, x.T, s.endSpread(x.T)), Cp: told(s.cpUnit(), at.Cp, answer.CoverageFactor*relative*at.Cp)})
	}
}
