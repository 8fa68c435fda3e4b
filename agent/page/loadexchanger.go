package page

import (
	"math"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/view"
	"heatreeve/thermo/unit"
)

// exchangerPart tells of an exchanger that the load is a side of.
type exchangerPart struct {
	Name, Side string
	Other      link // the load of the other side
	When       string
	Why        string // there is no conductance: why
	Rows       []figureRow
	Reached    string // when fouling comes to its allowance
	Days       int    // of the course
	Curve      *curve
}

// figureRow is a name, a figure and a word of explanation.
type figureRow struct{ Name, Figure, Says string }

// exchangers are those that the load is a side of.
func (s *loadSheet) exchangers() (all []*exchangerPart) {
	for i := range s.site.Exchangers {
		x := &s.site.Exchangers[i]
		side, other := "the hot side", x.Cold
		switch s.index {
		case x.Hot:
		case x.Cold:
			side, other = "the cold side", x.Hot
		default:
			continue
		}
		p := &exchangerPart{Name: x.Name, Side: side}
		p.Other.Text = s.site.Loads[other].Name
		there := s.address
		there.load = p.Other.Text
		p.Other.To = there.link("exchanger")
		s.standing(p)
		all = append(all, p)
	}
	return all
}

// standing tells what the exchanger did in its last window.
func (s *loadSheet) standing(p *exchangerPart) {
	p.Why = "In the last hour there have been no minutes in which both sides flowed and were steady."
	for i := range s.snapshot.Exchangers {
		if s.snapshot.Exchangers[i].Name != p.Name {
			continue
		}
		x, ok := s.snapshot.Told(i)
		if !ok {
			return
		}
		p.When, p.Why = s.clock(time.Unix(0, x.At)), x.Why
		s.tellExchanger(p, x)
	}
}

func (s *loadSheet) tellExchanger(p *exchangerPart, x *view.Exchanger) {
	row := func(name, figure, says string) { p.Rows = append(p.Rows, figureRow{name, figure, says}) }
	if x.Why == "" {
		o := &x.Observed
		row("conductance UA", told(s.conductance(), o.Conductance, answer.CoverageFactor*x.RatioError*o.Conductance), "by both sides' readings")
		row("of a clean one", told(s.conductance(), o.Clean, 0), "at the same flows and temperatures")
		ratio := 100 * math.Exp(x.Ratio)
		row("left of it", told(perCent, ratio, answer.CoverageFactor*x.RatioError*ratio), "100 % is clean")
		row("fouling resistance", told(s.resistance(), o.Fouling, answer.CoverageFactor*x.FoulingError), "1/UA less that of the clean one")
		if x.Allowance > 0 {
			row("allowance", told(s.resistance(), x.Allowance, 0), "what may be lost to fouling, by the site file")
		}
	}
	row("closure", told(s.units.Duty, x.Closure, answer.CoverageFactor*x.Errors.Closure), "what the hot side gives, less what the cold side takes and the loss")
	p.Reached, p.Days = reached(x), x.Course.Days
	if x.Course.Days > 0 {
		p.Curve = s.foulingCourse(x)
	}
}

var perCent = unit.Unit{Symbol: "%", Factor: 1}

func (s *loadSheet) conductance() unit.Unit {
	return s.customary(unit.Conductance, "kW/K", "Btu/(h °F)")
}

// resistance is for plates of kilowatts: h °F/Btu would leave them no digits.
func (s *loadSheet) resistance() unit.Unit {
	u := s.customary(unit.HeatResistance, "K/kW", "h °F/Btu")
	if s.fahrenheit() {
		u.Symbol, u.Factor = "h °F/MMBtu", u.Factor/1e6
	}
	return u
}

// customary is the unit of a quantity that goes with the temperatures that the reader chose.
func (s *loadSheet) customary(of unit.Dimension, metric, other string) unit.Unit {
	name := metric
	if s.fahrenheit() {
		name = other
	}
	u, err := unit.LookupAs(name, of)
	if err != nil {
		panic(err) // the name is one of the table's
	}
	return u
}

// reached tells when fouling comes to its allowance.
func reached(x *view.Exchanger) string {
	in, early, late, ok := x.Reached()
	switch {
	case ok && math.IsInf(late, 1):
		return "Fouling comes to its allowance about " + dayText(x, in) + "; not before " + dayText(x, early) + " and, by how the days scatter, perhaps never (95 %)."
	case ok:
		return "Fouling comes to its allowance about " + dayText(x, in) + ", between " + dayText(x, early) + " and " + dayText(x, late) + " (95 %)."
	case x.Allowance == 0:
		return "The site file allows no fouling, so that no date is told."
	case x.Course.Days == 0:
		return "There is no course yet: it takes four days with steady windows since the last cleaning."
	case x.Course.Level >= x.Allowance:
		return "Fouling is beyond its allowance."
	}
	return "Fouling does not grow, so that no date is told."
}

// farthest is in how many days a date is still told.
const farthest = 36500

// dayText is the date so many days behind the last of the course. Days are those of UTC.
func dayText(x *view.Exchanger, in float64) string {
	if in > farthest {
		return "a hundred years from now"
	}
	return time.Unix(int64(math.Floor(x.Course.Last+in))*86400, 0).UTC().Format("2 January 2006")
}
