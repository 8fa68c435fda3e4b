// Package learning makes samples of a load's records and of the readings of tags, and writes
// a baseline that was learned from them as the block of a site file. It is pure.
package learning

import (
	"math"
	"slices"
	"sort"
	"time"

	"heatreeve/agent/design/expect"
)

// Steps are the readings of a tag, each of which holds until the next, and at most for Hold.
type Steps struct {
	Hold int64 // ns; 0 for no bound
	all  []step
}

type step struct {
	at    int64
	value float64 // NaN where there is none
}

// Add takes in a reading, SI; a value of NaN says that the tag has none from then on.
func (s *Steps) Add(at int64, value float64) {
	n := len(s.all)
	if n > 0 && at < s.all[n-1].at {
		n = sort.Search(n, func(i int) bool { return s.all[i].at > at })
	}
	s.all = slices.Insert(s.all, n, step{at, value})
}

// Mean is the time-weighted mean over [from, to), NaN where the tag had no value for half of
// that or more.
func (s *Steps) Mean(from, to int64) float64 {
	first := max(0, sort.Search(len(s.all), func(i int) bool { return s.all[i].at > from })-1)
	var sum float64
	var known int64
	for i := first; i < len(s.all) && s.all[i].at < to; i++ {
		end := to
		if i+1 < len(s.all) {
			end = min(end, s.all[i+1].at)
		}
		if s.Hold > 0 {
			end = min(end, s.all[i].at+s.Hold)
		}
		span := end - max(from, s.all[i].at)
		if x := s.all[i].value; span > 0 && x == x {
			sum += x * float64(span)
			known += span
		}
	}
	if 2*known <= to-from {
		return math.NaN()
	}
	return sum / float64(known)
}

// Minute is one of a load.
type Minute struct {
	Start    int64
	Measured float64 // s
	Idle     bool
	Duty     float64 // mean of the measured time, W
}

// whole is the part of a span that must be measured and not idle, as of a minute that counts
// in a verdict.
const whole = 0.9

// Samples are the means over spans of by, which must divide an hour, that were measured and
// not idle for nine tenths or more; hours are by the clock of the zone. The minutes come in
// the order of time.
func Samples(minutes []Minute, tags []Steps, by int64, zone *time.Location) (all []expect.Sample) {
	for len(minutes) > 0 {
		start := minutes[0].Start - minutes[0].Start%by
		var heat, measured float64
		n := 0
		for n < len(minutes) && minutes[n].Start < start+by {
			if m := &minutes[n]; !m.Idle {
				heat += m.Duty * m.Measured
				measured += m.Measured
			}
			n++
		}
		minutes = minutes[n:]
		if measured*1e9 < whole*float64(by) {
			continue
		}
		x := expect.Sample{At: start, Hour: hourOf(start, zone), Duty: heat / measured}
		for i := range tags {
			x.Drivers = append(x.Drivers, tags[i].Mean(start, start+by))
		}
		all = append(all, x)
	}
	return all
}

// hourOf is the hour of the week, from Monday midnight.
func hourOf(at int64, zone *time.Location) int {
	t := time.Unix(0, at).In(zone)
	return (int(t.Weekday())+6)%7*24 + t.Hour()
}
