package design

import (
	"math"

	"heatreeve/agent/design/expect"
	"heatreeve/agent/design/steady"
)

// Ground is what a verdict rests on.
type Ground uint8

const (
	NoTarget    Ground = iota // the load has no design
	TooFew                    // too few minutes yet
	NotWhole                  // a minute is missing or idle in part
	NotExpected               // nothing is known of what is expected of a minute
	Unsteady                  // the load is not steady
	Beyond                    // all minutes are beyond the allowance on one side, by more than U
	TooUnsure                 // U is as wide as the allowance
	Within                    // all minutes are within the allowance
	Between                   // some are within and some beyond, or not by more than U: the last verdict stands
)

// Grounds are what the verdict on a load rests on: the figures of its last minutes.
type Grounds struct {
	Verdict Verdict // but for what is blind or idle at this instant
	Ground  Ground
	Target  Target
	Minutes int // that there are, of Lasting
	Lasting int
	Why     string            // nothing is expected: why
	Today   expect.Expected   // of the last minute, or the fixed duty before the first
	By      expect.Conditions // of the last minute
	Mean                      // of the minutes, where each is whole and something is expected of it
	Steady  steady.Told
	Moving  int // minutes by which the load was not steady
	Drift   Drift
}

// Allowance is how far the mean may be from what is expected, W.
func (g *Grounds) Allowance() float64 { return g.Target.Allow * math.Abs(g.Expected) }

// Grounds are those of the last minute.
func (j *Judge) Grounds() Grounds { return j.grounds }

// decide weighs the minutes that there are.
func (j *Judge) decide() {
	j.grounds = Grounds{Target: j.target, Minutes: len(j.Window), Lasting: j.lasting, Today: j.today(), By: j.Conditions, Steady: j.Gate.Now, Drift: j.Drift.Drift()}
	j.grounds.Verdict, j.grounds.Ground = j.weigh(&j.grounds)
}

// today is what is expected of the last minute.
func (j *Judge) today() expect.Expected {
	if n := len(j.Window); n > 0 {
		return j.Window[n-1].Expected
	}
	if f, ok := j.target.Expect.(expect.Fixed); ok {
		return f.At(expect.Conditions{})
	}
	return expect.Expected{Why: "no minute has passed yet"}
}

// weigh fills in the figures and returns the verdict by them.
func (j *Judge) weigh(g *Grounds) (Verdict, Ground) {
	switch {
	case !j.target.designed():
		return Undecided, NoTarget
	case len(j.Window) < j.lasting:
		return Undecided, TooFew
	}
	for i := range j.Window {
		s := &j.Window[i]
		switch {
		case !s.Whole:
			return Undecided, NotWhole
		case !s.Known:
			g.Why = s.Why
			return Undecided, NotExpected
		}
	}
	g.Mean, g.Moving = mean(j.Window, j.target.Allow), moving(j.Window)
	n, U, a := len(j.Window), 2*g.Uncertainty(), g.Allowance()
	switch {
	case !g.Steady.Steady, g.Moving > 0 && g.Below+g.Above > 0:
		return Undecided, Unsteady
	case g.Below == n && math.Abs(g.Deviation) > U:
		return Short, Beyond
	case g.Above == n && math.Abs(g.Deviation) > U:
		return Over, Beyond
	case U >= a:
		return Undecided, TooUnsure
	case g.Below+g.Above == 0:
		return Holding, Within
	}
	return j.Last, Between
}

// moving counts the minutes by which the load was not steady. On the crest of a swing it is
// steady for a moment, which makes no window that is beyond its allowance.
func moving(all []Seen) int {
	n := 0
	for i := range all {
		if all[i].Moving {
			n++
		}
	}
	return n
}
