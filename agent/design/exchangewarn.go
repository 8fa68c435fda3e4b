package design

import (
	"math"

	"heatreeve/agent/design/cause"
)

// warn raises and clears the exchanger's warnings by its monitors, once a window has ended; hot
// is the judge of its hot side.
func (x *Exchange) warn(hot *Judge) {
	if x.Block != 0 || len(x.Window[0]) == 0 {
		return
	}
	s := &x.Last
	if x.Fouling.Side < 0 {
		w := Warning{Kind: WarnFouling, Since: x.Fouling.Since, Now: math.Expm1(s.Fouling.Deviation)}
		if u := math.Hypot(s.RatioError, s.Fouling.Scatter); u > 0 {
			w.Significance = s.Fouling.Deviation / u
		}
		x.tell(w, hot)
	} else {
		x.clear(WarnFouling, s.At)
	}
	if x.Balance.Side != 0 {
		x.tell(Warning{Kind: WarnUnbalanced, Since: x.Balance.Since, Now: s.Balance.Deviation, Significance: s.Zeta()}, hot)
	} else {
		x.clear(WarnUnbalanced, s.At)
	}
}

// tell raises a warning with what to look at first.
func (x *Exchange) tell(w Warning, hot *Judge) {
	e := hot.Evidence()
	e.Subject, w.Subject = x.of.Name, x.of.Name
	w.Causes = cause.Rank(e)
	x.raise(w, x.Last.At)
}

// evidence is what both sides tell together.
func (x *Exchange) evidence() cause.Exchanger {
	s := &x.Last
	e := cause.Exchanger{Name: x.of.Name}
	if s.At == 0 {
		return e
	}
	e.Closure = cause.Estimate{Known: true, Value: s.Closure, Uncertainty: math.Hypot(s.Errors.Closure, s.Balance.Scatter*s.duty())}
	if s.Why != "" && !s.Observed.IllConditioned {
		return e
	}
	e.Conductance = cause.Estimate{Known: !math.IsNaN(s.Ratio), Value: s.Ratio, Uncertainty: math.Hypot(s.RatioError, s.Fouling.Scatter)}
	e.IllConditioned, e.Effectiveness, e.Limit = s.Observed.IllConditioned, s.Observed.Effectiveness, s.Observed.Limit
	e.Fouling = cause.Estimate{Known: true, Value: s.Observed.Fouling, Uncertainty: s.FoulingError}
	if c := s.Course; c.Days > 0 {
		e.Trend = cause.Estimate{Known: true, Value: 7 * c.Slope, Uncertainty: 7 * c.SlopeError}
	}
	e.Days = x.Days.evidence()
	for _, m := range [...]*Monitor{&x.Fouling, &x.Balance} {
		if m.Side != 0 && (e.Since == 0 || m.Since/nanosecondsPerDay < e.Since) {
			e.Since = m.Since / nanosecondsPerDay
		}
		e.Signalled = e.Signalled || m.Side != 0
	}
	return e
}

const nanosecondsPerDay = 24 * 60 * nanosecondsPerMinute

// across is the load's side of its exchanger.
func (j *Judge) across() *Across {
	x := j.exchange
	return &Across{
		Model: &x.of.Model, State: x.Last.State, Weight: x.Last.Weight, Loss: x.of.Loss,
		Hot: j.side == 0, Expects: j.target.ByExchanger,
	}
}
