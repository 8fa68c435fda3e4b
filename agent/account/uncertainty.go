package account

import (
	"cmp"
	"math"
	"slices"

	"heatreeve/agent/loads"
)

// Uncertainty is that of the heat served in the measured time, kept so that it adds up
// over time as errors do. The bridged heat is not in it.
type Uncertainty struct {
	// Parts are the signed contributions of what lasts, J: the same error all the time,
	// so that they add up as they stand.
	Parts [loads.Parts]float64
	// Variance is that of what changes from reading to reading, J²: it adds up as
	// variances do.
	Variance float64
	// Unparted is the sum of u·dt, J, over records that tell the standard uncertainty u
	// of the duty and not what it is made of. All of it is taken to last, and to be of
	// one sign with the parts, which is the safe side.
	Unparted float64
}

// Systematic is the standard uncertainty by what lasts, J: the root of the sum of the
// squares of Parts, and Unparted on top.
func (u *Uncertainty) Systematic() float64 { return u.parts() + u.Unparted }

func (u *Uncertainty) parts() float64 {
	var sum float64
	for _, x := range u.Parts {
		sum = math.Hypot(sum, x)
	}
	return sum
}

// Random is the standard uncertainty by what does not last, J.
func (u *Uncertainty) Random() float64 { return math.Sqrt(u.Variance) }

// Standard is the combined standard uncertainty, J (JCGM 100:2008, 5.1.2).
func (u *Uncertainty) Standard() float64 { return math.Hypot(u.Systematic(), u.Random()) }

const (
	// RandomShare and UnpartedShare name shares that are not those of a part.
	RandomShare   = "random"
	UnpartedShare = "not told apart"
)

// Share is what one part has in an uncertainty.
type Share struct {
	Name        string
	Uncertainty float64 // standard, J, not below zero; of [UnpartedShare] what it adds to the others
	Fraction    float64 // of the variance; those of all shares add up to 1
}

// Shares lists the shares that are not zero, largest first.
func (u *Uncertainty) Shares() []Share {
	total := u.Standard()
	if total == 0 {
		return nil
	}
	var all []Share
	add := func(name string, x, fraction float64) {
		if fraction > 0 {
			all = append(all, Share{name, x, fraction})
		}
	}
	square := func(x float64) float64 { return (x / total) * (x / total) }
	for i, x := range u.Parts {
		add(loads.Part(i).String(), math.Abs(x), square(x))
	}
	add(RandomShare, u.Random(), square(u.Random()))
	add(UnpartedShare, u.Unparted, square(u.Systematic())-square(u.parts()))
	slices.SortStableFunc(all, func(a, b Share) int { return cmp.Compare(b.Fraction, a.Fraction) })
	return all
}
