package agent

import (
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/store"
)

func registerOf(r store.Register) *answer.Register {
	return &answer.Register{
		Given: r.Given, Taken: r.Taken, BridgedGiven: r.BridgedGiven, BridgedTaken: r.BridgedTaken,
		Measured: r.Measured, Bridged: r.Bridged, Missing: r.Missing, Uncertain: r.Uncertain,
	}
}

// periodReport tells p by the clock of the plan's zone.
func periodReport(p *account.Period, plan *account.Plan) answer.PeriodReport {
	at := func(ns int64) time.Time { return time.Unix(0, ns).In(plan.Zone) }
	u := &p.Uncertainty
	r := answer.PeriodReport{
		Start: at(p.Start), End: at(p.End), AccountedFrom: at(p.From), AccountedTo: at(p.To),
		Given: p.Given, Taken: p.Taken, BridgedGiven: p.BridgedGiven, BridgedTaken: p.BridgedTaken,
		Uncertainty: u.Standard(), Systematic: u.Systematic(), Random: u.Random(), Expanded: answer.CoverageFactor * u.Standard(), Shares: shares(u),
		Measured: seconds(p.Measured), Bridged: seconds(p.Bridged), Missing: seconds(p.Missing), Latent: seconds(p.Latent), Uncertain: seconds(p.Uncertain), Coverage: p.Coverage(),
	}
	if p.Measured > 0 {
		mean, meanU := p.Mean()
		r.Mean, r.MeanU = &mean, &meanU
		r.Lowest = &answer.Extreme{Duty: p.Lowest.Duty, Start: at(p.Lowest.Start), End: at(p.Lowest.End)}
		r.Highest = &answer.Extreme{Duty: p.Highest.Duty, Start: at(p.Highest.Start), End: at(p.Highest.End)}
	}
	if deviation, ok := p.Deviation(); ok {
		r.Witness = &answer.Witness{Counted: p.Witness, Served: p.Compared, Deviation: deviation}
	}
	if d := p.Demand; plan.Demand != 0 {
		r.Demand = &answer.Demand{Windows: d.Windows, Full: d.Full}
		if d.PeakEnd > d.PeakStart {
			r.Demand.Peak = &answer.Peak{Duty: d.Peak, Start: at(d.PeakStart), End: at(d.PeakEnd), Coverage: d.PeakCoverage}
		}
	}
	return r
}

func shares(u *account.Uncertainty) []answer.Share {
	all := []answer.Share{}
	for _, s := range u.Shares() {
		all = append(all, answer.Share{Part: s.Name, Uncertainty: s.Uncertainty, Fraction: s.Fraction})
	}
	return all
}
