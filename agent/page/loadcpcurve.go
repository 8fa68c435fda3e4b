package page

import (
	"math"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

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
