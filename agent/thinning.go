package agent

import (
	"math"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/store"
)

// thinning makes points of equal length of the minutes or hours of one load.
type thinning struct {
	start, span int64 // of the first point, and of each
	points      []point
}

// newThinning has the points that the time from from to to touches, to excluded.
func newThinning(from, to, span int64) *thinning {
	t := &thinning{start: floorTo(from, span), span: span}
	if from < to {
		t.points = make([]point, pointsIn(from, to, span))
	}
	return t
}

// point adds up what lies in it. Means are by the measured time.
type point struct {
	measured, bridged, given, taken float64
	served, mass                    float64 // J, kg
	lowest, highest                 float64 // W, where anything was measured
	uncertainty                     account.Uncertainty
	inlet, outlet                   weighed
	expected, expectedError         weighed
	flows                           bool // it is a stream's
}

// weighed is a mean over the time in which there was a value.
type weighed struct{ sum, over float64 }

func (w *weighed) add(x, over float64) { w.sum, w.over = w.sum+x*over, w.over+over }

// present adds a value of which 0 says that there is none.
func (w *weighed) present(x, over float64) {
	if x != 0 {
		w.add(x, over)
	}
}

func (w *weighed) mean() *float64 { return quotient(w.sum, w.over) }

// quotient is nil where nothing is to divide by, and for what JSON has no number for.
func quotient(x, over float64) *float64 {
	if q := x / over; over > 0 && !math.IsNaN(q) && !math.IsInf(q, 0) {
		return &q
	}
	return nil
}

// at is the point that holds an instant; nil where none does.
func (t *thinning) at(instant int64) *point {
	if i := (instant - t.start) / t.span; instant >= t.start && i < int64(len(t.points)) {
		return &t.points[i]
	}
	return nil
}

func (t *thinning) minute(m *store.Minute) {
	p := t.at(m.Start)
	if p == nil {
		return
	}
	p.bounds(m.Measured, m.DutyMin, m.DutyMax)
	p.amounts(m.Measured, m.Bridged, m.Given, m.Taken, m.Duty)
	p.mass += m.Flow * m.Measured
	p.means(m.Measured, m.Inlet, m.Outlet, m.Expected, m.ExpectedError)
	p.doubt(&m.Systematic, m.Random, untold(m))
}

// hour adds an hour to the point in which it begins.
func (t *thinning) hour(h *store.Hour) {
	p := t.at(max(h.Start, t.start))
	if p == nil {
		return
	}
	p.bounds(h.Measured, h.DutyMin, h.DutyMax)
	p.amounts(h.Measured, h.Bridged, h.Given, h.Taken, h.Duty)
	p.mass += h.Mass
	p.means(h.Measured, h.Inlet, h.Outlet, h.Expected, h.ExpectedError)
	p.doubt(&h.Systematic, h.Random, h.Untold)
}

// bounds takes in the extremes of a record before its measured time is added.
func (p *point) bounds(measured, lowest, highest float64) {
	switch {
	case measured == 0:
	case p.measured == 0:
		p.lowest, p.highest = lowest, highest
	default:
		p.lowest, p.highest = min(p.lowest, lowest), max(p.highest, highest)
	}
}

func (p *point) amounts(measured, bridged, given, taken, duty float64) {
	p.measured, p.bridged = p.measured+measured, p.bridged+bridged
	p.given, p.taken = p.given+given, p.taken+taken
	p.served += served(given, taken, duty)
}

func (p *point) means(measured, inlet, outlet, expected, expectedError float64) {
	p.inlet.present(inlet, measured)
	p.outlet.present(outlet, measured)
	p.flows = p.flows || inlet != 0 || outlet != 0
	if expected != 0 || expectedError != 0 {
		p.expected.add(expected, measured)
		p.expectedError.add(expectedError, measured)
	}
}

// doubt adds what lasts as it stands, and variances.
func (p *point) doubt(parts *[store.Shares]float64, variance, untold float64) {
	u := uncertainty(parts, variance, untold)
	for i, x := range u.Parts {
		p.uncertainty.Parts[i] += x
	}
	p.uncertainty.Variance += u.Variance
	p.uncertainty.Unparted += u.Unparted
}

// columns are those of all points, also of those that have no record.
func (t *thinning) columns() *answer.Series {
	n := len(t.points)
	numbers := func() []float64 { return make([]float64, n) }
	some := func() []*float64 { return make([]*float64, n) }
	s := &answer.Series{
		Span: seconds(t.span), Start: make([]int64, n),
		Lowest: some(), Highest: some(), Mean: some(), Uncertainty: some(), Expected: some(), ExpectedU: some(),
		Inlet: some(), Outlet: some(), Flow: some(),
		Measured: numbers(), Bridged: numbers(), Given: numbers(), Taken: numbers(),
	}
	for i := range t.points {
		p := &t.points[i]
		s.Start[i] = (t.start + int64(i)*t.span) / 1e9
		s.Measured[i], s.Bridged[i], s.Given[i], s.Taken[i] = p.measured, p.bridged, p.given, p.taken
		s.Mean[i], s.Uncertainty[i] = quotient(p.served, p.measured), quotient(p.uncertainty.Standard(), p.measured)
		s.Inlet[i], s.Outlet[i] = p.inlet.mean(), p.outlet.mean()
		s.Expected[i], s.ExpectedU[i] = p.expected.mean(), p.expectedError.mean()
		if p.measured > 0 {
			s.Lowest[i], s.Highest[i] = quotient(p.lowest, 1), quotient(p.highest, 1)
		}
		if p.flows {
			s.Flow[i] = quotient(p.mass, p.measured)
		}
	}
	return s
}
