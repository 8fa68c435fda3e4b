package design

import "math"

// Ground is what a verdict rests on.
type Ground uint8

const (
	NoTarget  Ground = iota // the load has no design
	TooFew                  // too few minutes yet
	NotWhole                // a minute is missing or idle in part
	Unsteady                // the minutes spread by more than the allowance
	Beyond                  // all minutes are beyond the allowance on one side, by more than U
	TooUnsure               // U is as wide as the allowance
	Within                  // all minutes are within the allowance
	Between                 // some are within and some beyond, or not by more than U: the last verdict stands
)

// Grounds are what the verdict on a load rests on: the figures of its last minutes, W.
type Grounds struct {
	Verdict Verdict // but for what is blind or idle at this instant
	Ground  Ground
	Target  Target
	Minutes int // that there are, of Lasting
	Lasting int
	// Of the minutes, where each is whole: their mean, its standard uncertainty, and the
	// least and the greatest.
	Mean, Uncertainty, Least, Most float64
}

// Grounds decides, and tells what by.
func (j *Judge) Grounds() Grounds {
	g := Grounds{Target: j.target, Minutes: len(j.Minutes), Lasting: j.lasting}
	g.Verdict, g.Ground = j.weigh(&g)
	return g
}

// weigh fills in the figures and returns the verdict by them.
func (j *Judge) weigh(g *Grounds) (Verdict, Ground) {
	switch {
	case j.target.Duty == 0:
		return Undecided, NoTarget
	case len(j.Minutes) < j.lasting:
		return Undecided, TooFew
	}
	s, whole := summarise(j.Minutes)
	if !whole {
		return Undecided, NotWhole
	}
	g.Mean, g.Uncertainty, g.Least, g.Most = s.mean, s.uncertainty, s.least, s.most
	a := j.target.Allow * j.target.Duty
	d, U := s.mean-j.target.Duty, 2*s.uncertainty
	switch {
	case !(s.most-s.least <= a):
		return Undecided, Unsteady
	case s.most < j.target.Duty-a && math.Abs(d) > U:
		return Short, Beyond
	case s.least > j.target.Duty+a && math.Abs(d) > U:
		return Over, Beyond
	case U >= a:
		return Undecided, TooUnsure
	case s.least >= j.target.Duty-a && s.most <= j.target.Duty+a:
		return Holding, Within
	}
	return j.Last, Between
}
