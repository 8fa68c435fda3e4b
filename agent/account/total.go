package account

import "heatreeve/agent/loads"

// sums add up amounts, with compensation.
type sums struct {
	measured, bridged, latent, uncertain     int64
	given, taken, bridgedGiven, bridgedTaken loads.Sum
	served, variance, unparted               loads.Sum
	witness, compared                        loads.Sum
	parts                                    [loads.Parts]loads.Sum
}

func (s *sums) add(a *Amounts) {
	s.measured += a.Measured
	s.bridged += a.Bridged
	s.latent += a.Latent
	s.uncertain += a.Uncertain
	s.given.Add(a.Given)
	s.taken.Add(a.Taken)
	s.bridgedGiven.Add(a.BridgedGiven)
	s.bridgedTaken.Add(a.BridgedTaken)
	s.served.Add(a.Served)
	s.variance.Add(a.Uncertainty.Variance)
	s.unparted.Add(a.Uncertainty.Unparted)
	for i, x := range a.Uncertainty.Parts {
		s.parts[i].Add(x)
	}
	s.witness.Add(a.Witness)
	s.compared.Add(a.Compared)
}

func (s *sums) amounts() Amounts {
	a := Amounts{
		Measured: s.measured, Bridged: s.bridged, Latent: s.latent, Uncertain: s.uncertain,
		Given: s.given.Value(), Taken: s.taken.Value(), BridgedGiven: s.bridgedGiven.Value(), BridgedTaken: s.bridgedTaken.Value(),
		Served:      s.served.Value(),
		Uncertainty: Uncertainty{Variance: s.variance.Value(), Unparted: s.unparted.Value()},
		Witness:     s.witness.Value(), Compared: s.compared.Value(),
	}
	for i := range s.parts {
		a.Uncertainty.Parts[i] = s.parts[i].Value()
	}
	return a
}

// Total adds periods that follow one another up to one. The zero value holds none.
type Total struct {
	period Period
	sums   sums
}

// Add adds p.
func (t *Total) Add(p Period) {
	s := &t.period
	if s.End == 0 && s.Start == 0 {
		s.Start, s.From = p.Start, p.From
	}
	s.End, s.To = p.End, p.To
	if p.Measured > 0 {
		s.extremes(t.sums.measured > 0, p.Lowest, p.Highest)
	}
	t.sums.add(&p.Amounts)
	s.Missing += p.Missing
	s.Demand.add(p.Demand)
}

// extremes takes in those of another part of p, which has some already or not.
func (p *Period) extremes(some bool, lowest, highest Extreme) {
	if !some || lowest.Duty < p.Lowest.Duty {
		p.Lowest = lowest
	}
	if !some || highest.Duty > p.Highest.Duty {
		p.Highest = highest
	}
}

// Period returns the sum: from the beginning of the first period to the end of the
// last, with the greatest demand and the extremes of all.
func (t *Total) Period() Period {
	p := t.period
	p.Amounts = t.sums.amounts()
	return p
}
