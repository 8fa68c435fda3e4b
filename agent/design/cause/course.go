package cause

import "math"

// rareDrift is how much less often an instrument drifts for days, as fouling grows, than it
// steps. Common practice, no source.
const rareDrift = 5

// course tells whether the days show a step or a ramp: the sum of squares that is left by
// the best of either, each with a level, a size and an onset. False where there are too few
// days to tell.
func course(days []Day) (step, ramp float64, ok bool) {
	sound := make([]Day, 0, len(days))
	for _, d := range days {
		if d.Conductance.sound() && (len(sound) == 0 || d.Day > sound[len(sound)-1].Day) {
			sound = append(sound, d)
		}
	}
	n := len(sound)
	if n < 5 {
		return 0, 0, false
	}
	step, ramp = math.Inf(1), math.Inf(1)
	for k := range n - 1 {
		at := sound[k].Day
		step = min(step, leftBy(sound, func(day int64) float64 {
			if day > at {
				return 1
			}
			return 0
		}))
		ramp = min(ramp, leftBy(sound, func(day int64) float64 { return float64(max(0, day-at)) }))
	}
	// Where even the better one does not fit, the days scatter by more than they say.
	if scatter := min(step, ramp) / float64(n-3); scatter > 1 {
		step, ramp = step/scatter, ramp/scatter
	}
	return step, ramp, finite(step, ramp)
}

// leftBy is the weighted sum of squares about the best level + size·shape(day).
func leftBy(days []Day, shape func(int64) float64) float64 {
	var w, x, y float64
	for _, d := range days {
		v := weight(d)
		w, x, y = w+v, x+v*shape(d.Day), y+v*d.Conductance.Value
	}
	x, y = x/w, y/w
	var xx, xy, yy float64
	for _, d := range days {
		v := weight(d)
		dx, dy := shape(d.Day)-x, d.Conductance.Value-y
		xx, xy, yy = xx+v*dx*dx, xy+v*dx*dy, yy+v*dy*dy
	}
	if !(xx > 0) {
		return yy
	}
	return max(0, yy-xy/xx*xy)
}

func weight(d Day) float64 { return 1 / (d.Conductance.Uncertainty * d.Conductance.Uncertainty) }

// againstCourse is what the course of the days adds to what a fault leaves over: fouling
// grows, an instrument steps and seldom drifts.
func againstCourse(days []Day) func(fault) float64 {
	step, ramp, ok := course(days)
	if !ok {
		return func(fault) float64 { return 0 }
	}
	least := min(step, ramp)
	return func(f fault) float64 {
		if f.isDesign {
			return ramp - least
		}
		return min(step, ramp+2*math.Log(rareDrift)) - least
	}
}
