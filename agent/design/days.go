package design

import (
	"math"

	"heatreeve/agent/design/cause"
)

// mostDays bounds the days that are kept.
const mostDays = 120

// Days are what the windows of an exchanger come to by the day.
type Days []DayMean

// DayMean is the mean of the windows of one day, counted from the epoch.
type DayMean struct {
	Day                  int64
	Windows              int
	Conductance, Closure Running // ln(UA/UA_clean), and W
}

// Running is a mean with the sum of the squares about it.
type Running struct{ Mean, Squares float64 }

func (r *Running) add(x float64, n int) {
	was := r.Mean
	r.Mean += (x - was) / float64(n)
	r.Squares += (x - was) * (x - r.Mean)
}

// estimate is the mean with its standard uncertainty by the scatter of n.
func (r *Running) estimate(n int) cause.Estimate {
	if n < 2 {
		return cause.Estimate{}
	}
	return cause.Estimate{Known: true, Value: r.Mean, Uncertainty: math.Sqrt(r.Squares / float64(n-1) / float64(n))}
}

// observe takes in a window.
func (d *Days) observe(day int64, ratio, closure float64) {
	n := len(*d)
	if n == 0 || (*d)[n-1].Day < day {
		if n == mostDays {
			*d = append((*d)[:0], (*d)[1:]...)
			n--
		}
		*d = append(*d, DayMean{Day: day})
		n++
	}
	x := &(*d)[n-1]
	x.Windows++
	x.Conductance.add(ratio, x.Windows)
	x.Closure.add(closure, x.Windows)
}

// evidence are the days as causes are told from.
func (d Days) evidence() []cause.Day {
	var all []cause.Day
	for i := range d {
		x := &d[i]
		all = append(all, cause.Day{Day: x.Day, Conductance: x.Conductance.estimate(x.Windows), Closure: x.Closure.estimate(x.Windows)})
	}
	return all
}
