package exchanger

import "math"

// mostDays bounds the days that a trend is laid through.
const mostDays = 120

// Day is the mean of one day.
type Day struct {
	Day        int64 // since the epoch
	N          int   // windows
	Mean, Sum2 float64
}

// Trend keeps the daily means of a figure. Its field is its state.
type Trend struct{ Days []Day }

// Observe takes in the figure of a window of a day.
func (t *Trend) Observe(day int64, x float64) {
	n := len(t.Days)
	if n == 0 || t.Days[n-1].Day < day {
		if n == mostDays {
			t.Days = append(t.Days[:0], t.Days[1:]...)
			n--
		}
		t.Days = append(t.Days, Day{Day: day})
		n++
	}
	d := &t.Days[n-1]
	d.N++
	was := d.Mean
	d.Mean += (x - was) / float64(d.N)
	d.Sum2 += (x - was) * (x - d.Mean)
}

// Course is the straight line through the days.
type Course struct {
	Days int
	// Slope is the rise a day with its standard uncertainty, by how the days scatter about the
	// line; Level is the line at the last day.
	Slope, SlopeError, Level float64
	mid, about               float64 // mean day, and Σ(day − mid)²
	scatter                  float64 // variance about the line
	last                     float64
}

// leastDays is of how many days a course is told.
const leastDays = 4

// Course returns the line of least squares through the days that have at least one window; a
// course of fewer than four days is not told, and Days is then 0.
func (t *Trend) Course() Course {
	n := float64(len(t.Days))
	if len(t.Days) < leastDays {
		return Course{}
	}
	c := Course{Days: len(t.Days), last: float64(t.Days[len(t.Days)-1].Day)}
	var mean, xy, yy float64
	for _, d := range t.Days {
		c.mid += float64(d.Day) / n
		mean += d.Mean / n
	}
	for _, d := range t.Days {
		dx, dy := float64(d.Day)-c.mid, d.Mean-mean
		c.about += dx * dx
		xy += dx * dy
		yy += dy * dy
	}
	c.Slope = xy / c.about
	c.scatter = max(0, yy-c.Slope*xy) / (n - 2)
	c.SlopeError = math.Sqrt(c.scatter / c.about)
	c.Level = mean + c.Slope*(c.last-c.mid)
	return c
}

// Reach tells in how many days after the last one the line comes to a limit, with an interval
// of about 95 % by Fieller's theorem (E. C. Fieller, J. R. Stat. Soc. B 16, 1954) with a factor
// of 2; late is +Inf where the slope might as well be none. ok is false where the line does
// not rise, or has passed the limit.
func (c *Course) Reach(limit float64) (days, early, late float64, ok bool) {
	if c.Days == 0 || !(c.Slope > 0) || c.Level >= limit {
		return 0, 0, 0, false
	}
	days = (limit - c.Level) / c.Slope
	// From the mean day on, where level and slope are independent: (y − b·x)² ≤ 4·(s²/n + s²·x²/Σ).
	y := limit - c.Level + c.Slope*(c.last-c.mid)
	v, w := c.scatter/float64(c.Days), c.scatter/c.about
	a, b, k := c.Slope*c.Slope-4*w, -2*y*c.Slope, y*y-4*v
	root := b*b - 4*a*k
	early, late = 0, math.Inf(1)
	if root >= 0 && a != 0 {
		x1, x2 := (-b-math.Sqrt(root))/(2*a), (-b+math.Sqrt(root))/(2*a)
		offset := c.last - c.mid
		if a > 0 {
			early, late = min(x1, x2)-offset, max(x1, x2)-offset
		} else if x := min(x1, x2); x > 0 || max(x1, x2) > 0 {
			early = max(x1, x2) - offset // open to the other end
		}
	}
	return days, max(0, early), late, true
}
