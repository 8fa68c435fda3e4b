package account

import "heatreeve/agent/loads"

// Total adds periods that follow one another up to one. The zero value holds none.
type Total struct {
	period                       Period
	given, taken, served, spread loads.Sum
}

// Add adds p.
func (t *Total) Add(p Period) {
	s := &t.period
	if s.End == 0 && s.Start == 0 {
		s.Start, s.From = p.Start, p.From
	}
	s.End, s.To = p.End, p.To
	if p.Covered() {
		if !s.Covered() || p.Lowest.Duty < s.Lowest.Duty {
			s.Lowest = p.Lowest
		}
		if !s.Covered() || p.Highest.Duty > s.Highest.Duty {
			s.Highest = p.Highest
		}
	}
	s.Measured += p.Measured
	s.Bridged += p.Bridged
	s.Missing += p.Missing
	t.given.Add(p.Given)
	t.taken.Add(p.Taken)
	t.served.Add(p.Served)
	t.spread.Add(p.Uncertainty)
	s.Demand.add(p.Demand)
}

// add joins the demand of a later period.
func (d *Demand) add(p Demand) {
	d.Windows += p.Windows
	d.Full += p.Full
	if p.PeakEnd > p.PeakStart && (d.PeakEnd == d.PeakStart || p.Peak > d.Peak) {
		d.Peak, d.PeakStart, d.PeakEnd, d.PeakCoverage = p.Peak, p.PeakStart, p.PeakEnd, p.PeakCoverage
	}
}

// Period returns the sum: from the beginning of the first period to the end of the
// last, with the greatest demand and the extremes of all. The uncertainties add up as
// they stand, as those of one period do.
func (t *Total) Period() Period {
	p := t.period
	p.Given, p.Taken, p.Served, p.Uncertainty = t.given.Value(), t.taken.Value(), t.served.Value(), t.spread.Value()
	return p
}
