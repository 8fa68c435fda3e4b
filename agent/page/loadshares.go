package page

import (
	"cmp"
	"math"
	"slices"

	"heatreeve/agent/answer"
	"heatreeve/agent/loads"
	"heatreeve/agent/shown"
)

// sharesPart tells what the uncertainty is made of: that of the newest figure, and that of the
// heat of the periods that are shown.
type sharesPart struct {
	Now, Heat       []shareBar // largest first
	Duty, HeatTotal string     // whose uncertainty it is
	None            string     // why there is nothing of the newest figure
}

// shareBar is what one part has in a variance.
type shareBar struct {
	Part     string
	Wide     part
	Fraction string
	Alone    string // its own expanded uncertainty
}

// smallestShare is what is shown by itself; what is below is counted together.
const smallestShare = 0.0005

func (s *loadSheet) shares(heat *answer.PeriodReport) *sharesPart {
	p := &sharesPart{}
	f := &s.figure
	switch {
	case !f.Measured():
		p.None = "There is no figure now."
	case f.Uncertainty == 0:
		p.None = "The newest figure has no uncertainty: the load is idle."
	default:
		p.Duty = told(s.units.Duty, f.Duty, answer.CoverageFactor*f.Uncertainty)
		p.Now = s.shareBars(figureShares(f), func(u float64) string {
			_, spread := shown.Figure(s.units.Duty, 0, answer.CoverageFactor*u)
			return "± " + spread + " " + shown.Label(s.units.Duty)
		})
	}
	if heat != nil && heat.Uncertainty > 0 {
		p.HeatTotal = told(s.units.Heat, heat.Given-heat.Taken, heat.Expanded)
		if heat.Taken > heat.Given {
			p.HeatTotal = told(s.units.Heat, heat.Taken-heat.Given, heat.Expanded)
		}
		p.Heat = s.shareBars(heat.Shares, func(u float64) string {
			_, spread := shown.Figure(s.units.Heat, 0, answer.CoverageFactor*u)
			return "± " + spread + " " + shown.Label(s.units.Heat)
		})
	}
	return p
}

// figureShares are the shares in the variance of a figure, largest first.
func figureShares(f *loads.Figure) (all []answer.Share) {
	whole := f.Uncertainty * f.Uncertainty
	add := func(name string, u float64) {
		if u != 0 {
			all = append(all, answer.Share{Part: name, Uncertainty: math.Abs(u), Fraction: u * u / whole})
		}
	}
	for i, u := range f.Share {
		add(loads.Part(i).String(), u)
	}
	add("random", f.Random)
	slices.SortStableFunc(all, func(a, b answer.Share) int { return cmp.Compare(b.Fraction, a.Fraction) })
	return all
}

func (s *loadSheet) shareBars(all []answer.Share, alone func(u float64) string) (bars []shareBar) {
	rest := 0.0
	for _, x := range all {
		if x.Fraction < smallestShare {
			rest += x.Fraction
			continue
		}
		bars = append(bars, shareBar{x.Part, part(x.Fraction), percentText(x.Fraction), alone(x.Uncertainty)})
	}
	if rest > 0 {
		bars = append(bars, shareBar{"all others", part(rest), percentText(rest), ""})
	}
	return bars
}
