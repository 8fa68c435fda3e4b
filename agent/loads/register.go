package loads

import "math"

// Sum adds float64s with Neumaier's compensation (A. Neumaier, ZAMM 54, 1974):
// the error does not grow with the number of terms. The zero value is zero.
type Sum struct{ Hi, Lo float64 }

// Add adds x, which must be finite.
func (s *Sum) Add(x float64) {
	t := s.Hi + x
	if math.Abs(s.Hi) >= math.Abs(x) {
		s.Lo += (s.Hi - t) + x
	} else {
		s.Lo += (x - t) + s.Hi
	}
	s.Hi = t
}

// Value returns the sum.
func (s Sum) Value() float64 { return s.Hi + s.Lo }

// Registers are the totals of one load since it was first accounted for. Heat
// in J only rises in each direction; Measured, Bridged and Missing in ns add up to the
// time accounted for. What was bridged is not in Given and Taken but apart. Uncertain is the
// part of Measured for which an uncertain reading was used.
type Registers struct {
	Given, Taken               Sum
	BridgedGiven, BridgedTaken Sum
	Measured, Bridged, Missing int64
	Uncertain                  int64
}

// book adds heat in J, positive where the stream gave it up.
func (r *Registers) book(heat float64, span int64, uncertain bool) {
	r.Measured += span
	if uncertain {
		r.Uncertain += span
	}
	if heat >= 0 {
		r.Given.Add(heat)
	} else {
		r.Taken.Add(-heat)
	}
}

// bridge adds heat in J that a straight line gives, with the sign of book.
func (r *Registers) bridge(heat float64, span int64) {
	r.Bridged += span
	if heat >= 0 {
		r.BridgedGiven.Add(heat)
	} else {
		r.BridgedTaken.Add(-heat)
	}
}

// add adds a part of a minute that was summed for one unit of flow a second where the
// flow was rate.
func (r *Registers) add(o *Minute, rate float64) {
	r.Measured += o.Measured
	r.Bridged += o.Bridged
	r.Missing += o.Missing
	r.Uncertain += o.Uncertain
	r.Given.Add(o.Given * rate)
	r.Taken.Add(o.Taken * rate)
	r.BridgedGiven.Add(o.BridgedGiven * rate)
	r.BridgedTaken.Add(o.BridgedTaken * rate)
}
