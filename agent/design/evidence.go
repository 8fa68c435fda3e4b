package design

import (
	"math"

	"heatreeve/agent/design/cause"
	"heatreeve/agent/design/steady"
)

// Attest are what a witness counted and what the load served in the same spans, J, of which
// older ones fade.
type Attest struct{ Counted, Served float64 }

// fading is the part of the sums that goes with each minute: they tell of the last six
// hours. Common practice, no source.
const fading = 1.0 / 360

func (a *Attest) observe(m *Minute) {
	a.Counted += m.Counted - a.Counted*fading
	a.Served += m.Served - a.Served*fading
}

// idleError is the standard uncertainty of the flow of a load that rests, as a part of its
// design flow: what is called idle lies below a tenth of that, evenly. Common practice, no
// source.
const idleError = 0.1 / 1.7320508

// Evidence is what is known of the load over its last minutes, for [cause.Rank]: where it is a
// side of an exchanger, with what both sides tell together.
func (j *Judge) Evidence() cause.Evidence {
	e := j.own()
	if j.exchange == nil {
		return e
	}
	return j.across().Evidence(e, j.beside.own(), j.exchange.evidence())
}

// own is what the load itself tells.
func (j *Judge) own() cause.Evidence {
	g := &j.grounds
	e := cause.Evidence{Subject: j.target.Name}
	run, ok := j.ran()
	if !ok {
		return e
	}
	j.operating(&e, run)
	if run.Idle {
		return e
	}
	e.Steadiness = cause.Steadiness{
		Known: len(j.Window) == j.lasting, Steady: g.Steady.Steady, Worst: g.Steady.Worst,
		Change: g.Steady.Change, Limit: g.Steady.Limit, Stands: math.Abs(g.Steady.T),
		R: g.Steady.R, RLimit: steady.Rejects,
	}
	if g.Compared() || g.Ground == Unsteady {
		j.compared(&e, run)
	}
	if run.Doubt.Tag != "" {
		e.Marks = append(e.Marks, run.Doubt)
	}
	if run.Latent {
		e.Margins = append(e.Margins, cause.Margin{Kind: cause.NearDewPoint, Tag: j.target.Tags.Inlet})
	}
	return e
}

// ran is the mean of the window where each minute is whole, or the last minute where that
// is idle.
func (j *Judge) ran() (run Seen, ok bool) {
	n := len(j.Window)
	if n == 0 {
		return run, false
	}
	if last := j.Window[n-1]; last.Idle {
		return last, true
	}
	for i := range j.Window {
		s := &j.Window[i]
		if !s.Whole {
			return run, false
		}
		w := 1 / float64(n)
		run.Duty += w * s.Duty
		run.Lasting += w * s.Lasting
		run.At = run.At.plus(w, s.At)
		run.Errors = run.Errors.plus(w, s.Errors)
		run.Joint = run.Joint || s.Joint
		run.Latent = run.Latent || s.Latent
		if s.Doubt.Tag != "" {
			run.Doubt = s.Doubt
		}
	}
	return run, true
}

func (p Point) plus(w float64, q Point) Point {
	return Point{p.Flow + w*q.Flow, p.Inlet + w*q.Inlet, p.Outlet + w*q.Outlet}
}

// operating fills in where the stream runs beside its design, and what a change does to the
// duty: by the slopes half way between the two, with which flow, inlet and outlet together
// explain the whole.
func (j *Judge) operating(e *cause.Evidence, run Seen) {
	at, design, tags := run.At, j.target.Point, j.target.Tags
	if at.Flow == 0 && !run.Idle { // a vessel
		return
	}
	rise := at.Inlet - at.Outlet
	var c, perK, perFlow float64 // J/(kg K); W/K, W/(kg/s)
	if at.Flow > 0 && rise != 0 {
		c = run.Duty / at.Flow / rise
		perK, perFlow = c*at.Flow, c*rise
	}
	if design.Flow > 0 && design.Inlet > 0 && design.Outlet > 0 {
		perK, perFlow = c*(at.Flow+design.Flow)/2, c*(rise+design.Inlet-design.Outlet)/2
	}
	follows := j.target.ByExchanger && !run.Idle // nothing is expected of a load at rest
	put := func(o *cause.Operating, tag string, value, design, u, change, wrong float64) {
		*o = cause.Operating{
			Known: true, Tag: tag, Value: value, Design: design, Uncertainty: u, Follows: follows,
			Error: cause.Effect{Deviation: wrong, Duty: wrong},
		}
		if !follows {
			o.ByChange = change
		}
	}
	flowError := run.Errors.Flow
	if run.Idle && flowError == 0 {
		flowError = idleError * design.Flow
	}
	put(&e.Flow, tags.Flow, at.Flow, design.Flow, flowError, perFlow, c*rise)
	if !run.Idle { // else the thermometers tell nothing
		put(&e.Inlet, tags.Inlet, at.Inlet, design.Inlet, run.Errors.Inlet, perK, c*at.Flow)
		put(&e.Outlet, tags.Outlet, at.Outlet, design.Outlet, run.Errors.Outlet, -perK, -c*at.Flow)
	}
}

// compared fills in the deviation, what of its uncertainty comes from where, and the witness.
func (j *Judge) compared(e *cause.Evidence, run Seen) {
	g := &j.grounds
	u := g.Uncertainty()
	e.Deviation = cause.Estimate{Known: true, Value: g.Deviation, Uncertainty: u}
	e.Allowance = g.Allowance()
	if g.Duty < -2*g.Measured && g.Expected > 0 {
		e.Marks = append(e.Marks, cause.Mark{Tag: e.Inlet.Tag, Order: true}, cause.Mark{Tag: e.Outlet.Tag, Order: true})
	}
	if u > 0 {
		share := func(x float64) float64 { return x * x / (u * u) }
		for _, o := range []*cause.Operating{&e.Flow, &e.Inlet, &e.Outlet} {
			if !run.Joint { // else what lasts of the instruments is not in the deviation by itself
				e.Shares = append(e.Shares, cause.Share{Of: o.Tag, Share: share(o.Error.Duty * o.Uncertainty)})
			}
		}
		e.Shares = append(e.Shares, cause.Share{Of: "the expectation", Expectation: true, Share: share(g.ExpectedLasting)})
	}
	j.witnessed(e, run)
}

// witnessed fills in how far the duty is from that of its witness.
func (j *Judge) witnessed(e *cause.Evidence, run Seen) {
	w := &j.Witness
	if !(w.Served > 0) || !(j.target.WitnessError > 0 || j.target.WitnessStep > 0) {
		return
	}
	part := (w.Served - w.Counted) / w.Served
	duty := math.Abs(run.Duty)
	e.Witness = cause.Estimate{
		Known: true, Value: run.Duty * part,
		Uncertainty: math.Hypot(run.Lasting, duty*math.Hypot(j.target.WitnessError, j.target.WitnessStep/w.Served)),
	}
}
