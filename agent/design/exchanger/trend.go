package exchanger

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// mostDays bounds the days that a trend is laid through.
const mostDays = 120

// Day is the mean of one day.
type Day struct {
	Day  int64 // since the epoch
	N    int   // windows
	Mean float64
}

// Trend keeps the daily means of a fouling resistance since it was last cleaned away. Its
// field is its state.
type Trend struct{ Days []Day }

// Observe takes in the figure of a window of a day. Once a day is over, the trend begins
// afresh where that and the day before tell of a cleaning.
func (t *Trend) Observe(day int64, x float64) {
	if n := len(t.Days); n == 0 || t.Days[n-1].Day < day {
		switch {
		case t.cleaned():
			t.Days = append(t.Days[:0], t.Days[n-1])
		case n == mostDays:
			t.Days = append(t.Days[:0], t.Days[1:]...)
		}
		t.Days = append(t.Days, Day{Day: day})
	}
	d := &t.Days[len(t.Days)-1]
	d.N++
	d.Mean += (x - d.Mean) / float64(d.N)
}

const (
	// leastBefore is of how many days a course is to be told before one can fall from it.
	leastBefore = 6
	// mostFall is by how many of its standard uncertainties a day lies below its course where
	// something was cleaned away: common practice, no source.
	mostFall = 4
)

// cleaned tells whether the last two days both lie below the course of those before, by more
// than chance does, and by more than half of what had grown in them.
func (t *Trend) cleaned() bool {
	n := len(t.Days) - 2
	if n < leastBefore {
		return false
	}
	before := Trend{t.Days[:n]}
	c := before.Course()
	grown := c.Slope * (c.Last - float64(before.Days[0].Day))
	for _, d := range t.Days[n:] {
		x := float64(d.Day) - c.Mid
		fall := c.Level + c.Slope*(float64(d.Day)-c.Last) - d.Mean
		u := math.Sqrt(c.Scatter * (1 + 1/float64(n) + x*x/c.About))
		if !(fall > mostFall*u && fall > grown/2) {
			return false
		}
	}
	return true
}

// Course is the straight line of least squares through the days, each with the same weight:
// they scatter by more than their windows tell.
type Course struct {
	Days int
	// Slope is the rise a day with its standard uncertainty, by how the days scatter about the
	// line; Level is the line at the last day.
	Slope, SlopeError, Level float64
	Last, Mid                float64 // the last day and the mean one, since the epoch
	About                    float64 // Σ(day − Mid)²
	Scatter                  float64 // variance of a day about the line
	Student                  float64 // t of so many days, of 95 %
}

// leastDays is of how many days a course is told.
const leastDays = 4

// Course returns the line through the days that have at least one window; a course of fewer
// than four days is not told, and Days is then 0.
func (t *Trend) Course() Course {
	n := float64(len(t.Days))
	if len(t.Days) < leastDays {
		return Course{}
	}
	c := Course{Days: len(t.Days), Last: float64(t.Days[len(t.Days)-1].Day)}
	var mean, xy, yy float64
	for _, d := range t.Days {
		c.Mid += float64(d.Day) / n
		mean += d.Mean / n
	}
	for _, d := range t.Days {
		dx, dy := float64(d.Day)-c.Mid, d.Mean-mean
		c.About += dx * dx
		xy += dx * dy
		yy += dy * dy
	}
	c.Slope = xy / c.About
	c.Scatter = max(0, yy-c.Slope*xy) / (n - 2)
	c.SlopeError = math.Sqrt(c.Scatter / c.About)
	c.Level = mean + c.Slope*(c.Last-c.Mid)
	c.Student = distuv.StudentsT{Sigma: 1, Nu: n - 2}.Quantile(0.975)
	return c
}

// Reach tells in how many days after the last one the line comes to a limit, with an interval
// of about 95 % by Fieller's theorem (E. C. Fieller, J. R. Stat. Soc. B 16, 1954), with
// Student's t of the days; lasting is the standard uncertainty of the level that all days
// share. late is +Inf where the slope might as well be none. ok is false where the line does
// not rise, or has passed the limit.
//
// From the mean day on, where level and slope are independent, these are the x in
//
//	(y − b·x)² ≤ t²·(s²/n + s²·x²/Σ) + 4·lasting²
func (c *Course) Reach(limit, lasting float64) (days, early, late float64, ok bool) {
	if c.Days == 0 || !(c.Slope > 0) || c.Level >= limit {
		return 0, 0, 0, false
	}
	days = (limit - c.Level) / c.Slope
	since := c.Last - c.Mid
	y := limit - c.Level + c.Slope*since
	wide := c.Student * c.Student * c.Scatter
	a := c.Slope*c.Slope - wide/c.About
	k := y*y - wide/float64(c.Days) - 4*lasting*lasting
	early, late = 0, math.Inf(1)
	if root := y*y*c.Slope*c.Slope - a*k; root >= 0 && a != 0 {
		x1, x2 := (y*c.Slope-math.Sqrt(root))/a, (y*c.Slope+math.Sqrt(root))/a
		switch {
		case a > 0:
			early, late = x1-since, x2-since
		case k > 0: // no day from the mean one on to the first of these, and all after it
			early = max(x1, x2) - since
		}
	}
	return days, max(0, early), late, true
}
