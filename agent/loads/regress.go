package loads

import (
	"fmt"
	"math"
)

// point is a value at an instant, s, which stands for so many readings.
type point struct{ At, Value, Weight float64 }

// line is the straight line through points, by least squares.
type line struct {
	Points int
	Mean   float64 // of the values
	Rate   float64 // slope, in the unit of the values a second
	Error  float64 // standard error of Rate, from the scatter about the line
	Span   float64 // from the first point to the last, s
}

// fit returns the line through points, which come by time:
//
//	b = Σ w·(t − t̄)·(x − x̄) / Σ w·(t − t̄)²
//	u(b) = √(Σ w·r² / (N − 2) / Σ w·(t − t̄)²)
//
// where r is what is left between a value and the line. Of N readings at steps of dt with
// a scatter of s, u(b) is s·√(12/(N·(N² − 1)))/dt. The errors of the points must be
// independent of each other; of less than three points there is no scatter, and Error
// is 0.
func fit(points []point) (l line) {
	l.Points = len(points)
	if l.Points == 0 {
		return l
	}
	first := points[0]
	l.Span = points[l.Points-1].At - first.At
	var weight, t, x float64 // means beside those of the first point, so that they keep their digits
	for _, p := range points {
		weight += p.Weight
		t += p.Weight * (p.At - first.At)
		x += p.Weight * (p.Value - first.Value)
	}
	t, x = first.At+t/weight, first.Value+x/weight
	l.Mean = x
	var tt, tx float64
	for _, p := range points {
		tt += p.Weight * (p.At - t) * (p.At - t)
		tx += p.Weight * (p.At - t) * (p.Value - x)
	}
	if !(tt > 0) {
		return l
	}
	l.Rate = tx / tt
	if l.Points < leastPoints {
		return l
	}
	var rr float64
	for _, p := range points {
		r := p.Value - x - l.Rate*(p.At-t)
		rr += p.Weight * r * r
	}
	l.Error = math.Sqrt(rr / float64(l.Points-2) / tt)
	return l
}

// leastPoints is how many points tell a rate and its error.
const leastPoints = 3

// short says why the line does not tell a rate over a span of over, ns; it is empty where
// it does.
func (l *line) short(over int64) string {
	if l.Points >= leastPoints && l.Span*1e9 >= float64(over)/2 {
		return ""
	}
	return fmt.Sprintf("%d points over %.3g s of the last %.3g s do not tell a rate yet; %d over half of it do",
		l.Points, l.Span, float64(over)/1e9, leastPoints)
}

// uncertainty is the standard uncertainty of the rate of a tag's values: the scatter
// about the line, and what the steps of its numbers, or the band within which it does not
// report, hide from it:
//
//	u² = Error² + (3/8·Resolution² + 3/2·Deadband²) / Span²
//
// The second term is there because a value that stands still within its step scatters not at
// all. It is that of one error in the first half and another in the second (a line through a
// step of d has a slope of 1.5·d/Span); beside a scatter much wider than the step it is
// more than the step adds.
func (l *line) uncertainty(t *Tag) float64 {
	hidden := (t.Resolution*t.Resolution/4 + t.Deadband*t.Deadband) * 1.5 / (l.Span * l.Span)
	return math.Sqrt(l.Error*l.Error + hidden)
}
