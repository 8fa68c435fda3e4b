package cause

import "math"

const (
	// leastBefore is how many days in order there must be before a shift is told from them:
	// fewer do not tell how days scatter. Common practice, no source.
	leastBefore = 5
	// mostNow is how many of the last days are taken together.
	mostNow = 14
)

// shifts are how far closure and conductance have moved since they were in order.
func (x *Exchanger) shifts() (closure, conductance Estimate) {
	closure, conductance = x.ClosureShift, x.ConductanceShift
	if !closure.sound() {
		closure = x.shift(func(d *Day) Estimate { return d.Closure })
	}
	if !conductance.sound() {
		conductance = x.shift(func(d *Day) Estimate { return d.Conductance })
	}
	return closure, conductance
}

// shifted tells that the conductance is taken against that of a time before.
func (x *Exchanger) shifted() bool {
	_, conductance := x.shifts()
	return conductance.sound()
}

// shift is the mean of the last days that are off less that of the days before. Its
// uncertainty is by how the days before scatter, which holds what other loads on other days
// do, and not less than they say; few days tell their scatter badly, for which it is widened
// as the variance of Student's t is.
func (x *Exchanger) shift(of func(*Day) Estimate) Estimate {
	var before, now, first []Estimate
	began := x.began()
	for i := range x.Days {
		d := &x.Days[i]
		switch v := of(d); {
		case began == 0 || !v.sound():
		case d.Day < began:
			before = append(before, v)
		case d.Day > began:
			now = append(now, v)
		default:
			first = append(first, v)
		}
	}
	if len(now) == 0 { // it began on the last day, of which a part may have been in order
		now = first
	}
	n := len(before)
	if n < leastBefore || len(now) == 0 {
		return Estimate{}
	}
	now = now[max(0, len(now)-mostNow):]
	mean, variance := spread(before)
	last, _ := spread(now)
	variance *= float64(n-1) / float64(n-3)
	return Estimate{true, last - mean, math.Sqrt(variance * (1/float64(n) + 1/float64(len(now))))}
}

// began is the day on which what is off began. A monitor tells only when it left its dead
// band, days after a film began to grow; where a ramp fits the days as well as a step and far
// better than a level, it is the onset of the ramp.
func (x *Exchanger) began() int64 {
	var sound []Day
	for _, d := range x.Days {
		if d.Conductance.sound() && (len(sound) == 0 || d.Day > sound[len(sound)-1].Day) {
			sound = append(sound, d)
		}
	}
	n := len(sound)
	if x.Since == 0 || n <= leastBefore {
		return x.Since
	}
	flat := leftBy(sound, func(int64) float64 { return 0 })
	step, ramp, onset := math.Inf(1), math.Inf(1), int64(0)
	for k := leastBefore - 1; k < n-1; k++ {
		at := sound[k].Day
		step = min(step, leftBy(sound, func(day int64) float64 { return float64(min(1, max(0, day-at))) }))
		if left := leftBy(sound, func(day int64) float64 { return float64(max(0, day-at)) }); left < ramp {
			ramp, onset = left, at+1
		}
	}
	if scatter := max(1, min(step, ramp)/float64(n-3)); ramp <= step && (flat-ramp)/scatter > clearRamp {
		return min(x.Since, onset)
	}
	return x.Since
}

// clearRamp is by how much a ramp must fit better than a level, as chi-square with its two
// more parameters, to tell when it began: that of 99.9 %.
const clearRamp = 13.8

// spread is the mean, and the variance of one: as they scatter, and no less than stated.
func spread(all []Estimate) (mean, variance float64) {
	n := float64(len(all))
	var stated float64
	for _, v := range all {
		mean += v.Value / n
		stated += v.Uncertainty * v.Uncertainty / n
	}
	for _, v := range all {
		variance += (v.Value - mean) * (v.Value - mean) / max(1, n-1)
	}
	return mean, max(variance, stated)
}
