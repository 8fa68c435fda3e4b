package design

import (
	"heatreeve/agent/design/cause"
	"heatreeve/agent/design/exchanger"
)

// Across is the evidence of a load together with that of the other side of its exchanger.
// Each reading's error moves both what is measured and, where the exchanger tells it, what is
// expected; both are worked from the model.
type Across struct {
	Model        *exchanger.Model
	State        exchanger.State
	Weight, Loss float64 // of the hot side's duty, and W
	Hot          bool    // the load is the hot side
	Expects      bool    // its duty is expected by the exchanger
}

// Evidence joins both sides with what x tells of the exchanger, of which it fills in what
// ln(UA/UA_clean) does to the deviation.
func (a *Across) Evidence(own, other cause.Evidence, x cause.Exchanger) cause.Evidence {
	x.OnDeviation = a.Model.Sensitivity(&a.State)
	return own.Beside(other, x, func(r [6]float64) (cause.Effect, bool) {
		s := a.State
		near, far := &s.Hot, &s.Cold
		if !a.Hot {
			near, far = far, near
		}
		near.Flow, near.Inlet, near.Outlet = r[0], r[1], r[2]
		far.Flow, far.Inlet, far.Outlet = r[3], r[4], r[5]
		t := a.Model.Tell(&s, a.Weight, a.Loss)
		e := cause.Effect{Duty: t.Gives, Deviation: t.HotBeyond, Closure: t.Closure, Conductance: t.Ratio}
		if !a.Hot {
			e.Duty, e.Deviation = t.Takes, t.ColdBeyond
		}
		if !a.Expects {
			e.Deviation = e.Duty
		}
		return e, t.Ratio == t.Ratio && e.Deviation == e.Deviation
	})
}
