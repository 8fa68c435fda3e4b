package page

import (
	"math"
	"time"

	"heatreeve/agent/shown"
	"heatreeve/agent/view"
)

// foulingCourse draws the line through the days and on to the allowance.
func (s *loadSheet) foulingCourse(x *view.Exchanger) *curve {
	c, u := &x.Course, s.resistance()
	first, last, end := courseSpan(x)
	along := axis{From: first, To: end}
	var ds, ys, upper, lower []float64
	for i := range cpPoints {
		d := first + (end-first)*float64(i)/(cpPoints-1)
		line, half := c.Level+c.Slope*(d-c.Last), courseHalf(x, d)
		ds, ys = append(ds, d), append(ys, u.Of(line))
		upper, lower = append(upper, u.Of(line+half)), append(lower, u.Of(line-half))
	}
	y := roundAxis(min(0, least(ys)), max(u.Of(x.Allowance), greatest(ys)), 4)
	split := 0
	for split < len(ds)-1 && ds[split] < last {
		split++
	}
	p := drawCurve("fouling resistance by its course of days; the figures are in the table above", along, y, ds[:split+1], ys[:split+1])
	p.Ahead = curvePath(places(along, ds[split:]), heights(y, ys[split:]))
	p.Band = bandPath(places(along, ds), clipped(heights(y, upper)), clipped(heights(y, lower)))
	p.Below = []mark{across(0, dayLabel(first, "2 Jan")), across(along.at(last), dayLabel(last, "2 Jan")), across(1, dayLabel(end, "2 Jan 2006"))}
	p.Of, p.Unit = "fouling resistance", shown.Label(u)
	if x.Allowance > 0 {
		p.Limit = &level{y.down(u.Of(x.Allowance), curveHeight), "allowance"}
	}
	if in, early, late, ok := x.Reached(); ok {
		p.Zones = []zone{stretch(along, c.Last+early, min(c.Last+late, end), ""), stretch(along, c.Last+in, c.Last+in, "")}
	}
	return p
}

// courseSpan are the first and the last day of a course, and that up to which it is drawn: a
// little beyond the allowance, and at most four times as far as it goes back.
func courseSpan(x *view.Exchanger) (first, last, end float64) {
	c := &x.Course
	back := max(2*(c.Last-c.Mid), 3)
	ahead := back
	if in, _, late, ok := x.Reached(); ok {
		ahead = max(1.2*in, min(1.1*late, 2*in))
	}
	return c.Last - back, c.Last, c.Last + min(max(ahead, 1), 4*back)
}

// courseHalf is half the interval of about 95 % of the line at a day: of the days' scatter and of
// what lasts, as [exchanger.Course.Reach] reckons.
func courseHalf(x *view.Exchanger, day float64) float64 {
	c := &x.Course
	off := day - c.Mid
	scatter := c.Student * c.Student * c.Scatter * (1/float64(c.Days) + off*off/c.About)
	return math.Sqrt(scatter + 4*x.FoulingError*x.FoulingError)
}

// clipped keeps heights within the picture.
func clipped(ys []px) []px {
	for i := range ys {
		ys[i] = min(max(ys[i], 0), curveHeight)
	}
	return ys
}

func least(ys []float64) float64    { lo, _, _ := bounds(ys); return lo }
func greatest(ys []float64) float64 { _, hi, _ := bounds(ys); return hi }

func dayLabel(day float64, layout string) string {
	return time.Unix(int64(math.Floor(day))*86400, 0).UTC().Format(layout)
}
