package design

import (
	"math"
	"time"

	"heatreeve/agent/design/cause"
)

// follow gives a window to the monitor each time that its minutes are new, whole, expected
// and steady. What is off by many times what is expected is no scatter of that: nothing to
// speak of was.
func (j *Judge) follow(g *Grounds) {
	e := math.Abs(g.Expected)
	if j.Block++; j.Block < j.lasting || !g.Compared() || g.Moving > 0 || !(math.Abs(g.Deviation) < 10*e) {
		return
	}
	j.Block = 0
	j.Drift.Observe(j.Window[0].Start, g.Deviation/e, g.Systematic/e, g.Random/e)
	g.Drift = j.Drift.Drift()
}

// Compared tells whether the minutes stand beside what was expected of them, in a
// steady state.
func (g *Grounds) Compared() bool { return g.Ground >= Beyond }

// sides are the kinds of warnings by the side on which the duty lies.
var sides = [...]struct {
	kind    Kind
	verdict Verdict
	side    int
}{{WarnShort, Short, -1}, {WarnOver, Over, 1}}

// mostRest is how long a warning outlasts a load that rests, so that a stop by night does not
// end it. Common practice, no source.
const mostRest = int64(24 * time.Hour)

// warn raises and clears the load's warnings by its verdict and its monitor. One that stands
// stands while nothing can be told; it is over when the load holds, is on the other side, or
// has rested for a day.
func (j *Judge) warn(g *Grounds) {
	now := j.Window[len(j.Window)-1].Start + nanosecondsPerMinute
	over := j.Rests > 0 && now-j.Rests >= mostRest || g.Ground == NoTarget
	for _, s := range sides {
		switch {
		case g.Verdict == s.verdict:
			since := j.Window[0].Start
			if j.Drift.Side == s.side {
				since = min(since, j.Drift.Since)
			}
			j.raise(j.warning(s.kind, since, g), now)
		case over || g.Verdict != Undecided:
			j.clear(s.kind, now)
		}
	}
	if j.Drift.Side == 0 || over || j.standing(WarnShort) != nil || j.standing(WarnOver) != nil {
		j.clear(WarnDrifting, now) // it has come back, rests, or has gone on to be one of these
	} else if g.Compared() {
		j.raise(j.warning(WarnDrifting, j.Drift.Since, g), now)
	}
}

// warning is one by the grounds.
func (j *Judge) warning(k Kind, since int64, g *Grounds) Warning {
	w := Warning{Kind: k, Subject: j.target.Name, Since: since, Now: g.Part(), Causes: cause.Rank(j.Evidence())}
	if k == WarnDrifting && !g.Compared() {
		w.Now = j.Drift.Size
	}
	if u := g.Uncertainty(); u > 0 {
		w.Significance = g.Deviation / u
	}
	return w
}
