package cause

import "math"

// six lists the operating points of both sides.
func (e *Evidence) six() [6]*Operating {
	return [6]*Operating{&e.Flow, &e.Inlet, &e.Outlet, &e.OtherFlow, &e.OtherInlet, &e.OtherOutlet}
}

// Signatures fills in the Error of all six operating points, which must be known: how each
// figure that of tells changes with each reading, by central differences of a tenth of the
// reading's uncertainty. Of takes the readings in the order of the fields of Evidence, and
// tells of them what [Effect] names: the deviation, the duty, the closure and ln(UA/UA_clean). Where it
// does not tell, the Error is left as it is.
func (e *Evidence) Signatures(of func(readings [6]float64) (Effect, bool)) {
	var at [6]float64
	points := e.six()
	for i, o := range points {
		at[i] = o.Value
	}
	for i, o := range points {
		step := o.Uncertainty / 10
		if !(step > 1e-9*math.Abs(o.Value)) { // else rounding would show
			step = 1e-6 * math.Abs(o.Value)
		}
		up, down := at, at
		up[i], down[i] = at[i]+step, at[i]-step
		a, okA := of(up)
		b, okB := of(down)
		if w := up[i] - down[i]; okA && okB && w > 0 {
			o.Error = Effect{
				(a.Deviation - b.Deviation) / w, (a.Duty - b.Duty) / w,
				(a.Closure - b.Closure) / w, (a.Conductance - b.Conductance) / w,
			}
		}
	}
}
