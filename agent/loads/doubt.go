package loads

import "math"

// doubt is what may be wrong with one input of a heat equation: standard uncertainty and
// variances in its own unit. The zero value is that of a constant.
type doubt struct {
	accuracy float64 // lasts; what a matched pair has in common is a part of it
	coarse   float64 // variance of what lasts, but is this input's alone
	scatter  float64 // variance of what changes from reading to reading
	rate     float64 // what that adds to the variance of an integral, times s
}

// doubt returns what may be wrong with the reading x of the tag.
//
// A dead band D and a resolution r leave errors within ±D and ±r/2 (rectangular: D²/3 and
// r²/12; JCGM 100:2008, 4.3.7 and F.2.2.1) that stay as they are for as long as the number
// stands, and lean to the same side for as long as the quantity climbs. Nothing tells how
// long that is, so they are taken to last. A source with a dead band tells at once of what
// moves, so its differences tell no noise but the way of the quantity, and are not
// counted; noise beyond the dead band is then not known.
func (t *Tag) doubt(x float64, s *scatter) doubt {
	d := doubt{accuracy: t.Accuracy.Standard(x), coarse: t.Deadband*t.Deadband/3 + t.Resolution*t.Resolution/12}
	if t.scatters() {
		d.scatter, d.rate = s.variance(), s.rate()
	}
	return d
}

// scatters tells whether the differences between the tag's readings tell how far one may
// be off.
func (t *Tag) scatters() bool { return !t.OnChange && t.Deadband == 0 && t.Counter == nil }

// adds tells whether the tag's readings are amounts, which add up.
func (t *Tag) adds() bool { return t.Counter != nil && t.Counter.Each }

// lasting returns the standard uncertainty of what does not change from reading to
// reading, but for the part r of the accuracy's variance that another input shares.
func (d *doubt) lasting(shared float64) float64 {
	if shared == 0 && d.coarse == 0 {
		return d.accuracy
	}
	return math.Sqrt((1-shared)*d.accuracy*d.accuracy + d.coarse)
}

// step is how far the input is moved to see what it does: by its accuracy, or where none
// is stated by what else may be wrong; 0 of the zero value alone.
func (d *doubt) step() float64 {
	if d.accuracy > 0 {
		return d.accuracy
	}
	return math.Sqrt(d.coarse + d.scatter)
}
