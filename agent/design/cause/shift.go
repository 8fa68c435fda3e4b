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
	for i := range x.Days {
		d := &x.Days[i]
		switch v := of(d); {
		case x.Since == 0 || !v.sound():
		case d.Day < x.Since:
			before = append(before, v)
		case d.Day > x.Since:
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
