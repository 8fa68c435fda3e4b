package page

import (
	"context"
	"math"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/site"
	"heatreeve/thermo"
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
