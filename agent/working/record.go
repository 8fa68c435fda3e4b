package working

import (
	"fmt"
	"math"
	"time"

	"heatreeve/agent/figure"
	"heatreeve/agent/loads"
	"heatreeve/ingest/quality"
)

// Record is a minute that the history keeps of a load, when the readings of it are gone.
type Record struct {
	Site, Load string
	Zone       *time.Location
	Minute     loads.Minute
}

// OfRecord writes the working of a minute from its record: what it is the mean of is gone.
func OfRecord(r Record) *Working {
	m := &r.Minute
	s := sheet{&Working{Site: r.Site, Load: r.Load, At: time.Unix(0, m.Start).In(r.Zone), Span: 60, Factor: CoverageFactor}}
	s.note("the readings of this minute are no longer in the history: this is its record, whose means cannot be worked again from enthalpies")
	s.begin("Time")
	span := s.given("t", "measured", seconds(m.Measured), "s", 3, "record of the minute")
	if m.Uncertain > 0 {
		s.Quality = quality.Uncertain.String()
		s.given("tu", "of it by an uncertain reading", seconds(m.Uncertain), "s", 3, "")
	}
	s.given("tb", "bridged by a straight line", seconds(m.Bridged), "s", 3, "")
	s.given("tm", "missing", seconds(m.Missing), "s", 3, "")
	s.end()
	if m.Measured == 0 {
		s.note("nothing was measured in this minute, so it has no duty")
		return s.Working
	}
	s.means(m)
	duty := m.Duty
	s.Duty = &duty
	s.begin("Duty")
	given := s.given("E1", "heat that was given up", m.Given/1e3, "kJ", place(m.Given/1e3, fine+1), "record of the minute")
	taken := s.given("E2", "heat that was taken up", m.Taken/1e3, "kJ", place(m.Taken/1e3, fine+1), "")
	net := given.minus(taken)
	if (m.Given-m.Taken)*m.Duty < 0 {
		net = taken.minus(given)
	}
	s.worked(figure.Duty.Symbol, figure.Duty.By("mean of the minute, positive in the load's service"), net.over(span), m.Duty/1e3, "kW", place(m.Duty/1e3, fine-1), "")
	s.given("Qmin", "least on the grid", m.DutyMin/1e3, "kW", place(m.DutyMin/1e3, fine-1), "")
	s.given("Qmax", "greatest on the grid", m.DutyMax/1e3, "kW", place(m.DutyMax/1e3, fine-1), "")
	s.spread(m, span)
	return s.Working
}

func seconds(ns int64) float64 { return float64(ns) / 1e9 }

// means writes what the record tells of flow and state.
func (s *sheet) means(m *loads.Minute) {
	s.begin("Means of the minute")
	defer s.end()
	for _, x := range []struct {
		figure.Figure
		unit  string
		value float64
	}{
		{figure.MassFlow, "kg/s", m.MassFlow}, {figure.Inlet, "K", m.Inlet}, {figure.Outlet, "K", m.Outlet},
		{figure.Content, "K", m.Content}, {figure.Figure{Symbol: "p1", Words: "pressure at the inlet"}, "kPa", m.Pressure / 1e3},
	} {
		if x.value != 0 {
			s.given(x.Symbol, x.Words, x.value, x.unit, place(x.value, fine-1), "record of the minute")
		}
	}
}

// spread writes the uncertainty of a minute's mean duty.
func (s *sheet) spread(m *loads.Minute, span term) {
	s.begin("Uncertainty")
	defer s.end()
	var all []term
	t := seconds(m.Measured)
	for p, share := range m.Systematic {
		if share != 0 {
			e := s.given(fmt.Sprintf("e%d", p+1), "heat by the "+loads.Part(p).String(), share/1e3, "kJ", place(share/1e3, coarse), "record of the minute")
			all = append(all, s.worked(fmt.Sprintf("s%d", p+1), "share of the "+loads.Part(p).String(), e.over(span), share/t/1e3, "kW", place(share/t/1e3, coarse), ""))
		}
	}
	if m.Random > 0 {
		e := s.given("er", "heat by what is random", math.Sqrt(m.Random)/1e3, "kJ", place(math.Sqrt(m.Random)/1e3, coarse), "record of the minute")
		all = append(all, s.worked("sr", "share of what is random", e.over(span), math.Sqrt(m.Random)/t/1e3, "kW", place(math.Sqrt(m.Random)/t/1e3, coarse), ""))
	}
	if len(all) == 0 {
		return
	}
	lasting, random := m.Doubt()
	u := math.Sqrt(lasting*lasting + random)
	s.Uncertainty = &u
	standard := s.worked(figure.Uncertainty.Symbol, figure.Uncertainty.By("mean of the minute"), sum(squares(all)).root(), u/1e3, "kW", place(u/1e3, coarse), byLaw)
	s.worked("U", "expanded, with the coverage factor 2", number(CoverageFactor).times(standard), CoverageFactor*u/1e3, "kW", place(u/1e3, coarse), "JCGM 100:2008, 6.3.3")
}
