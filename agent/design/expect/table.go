package expect

import (
	"fmt"
	"math"
	"slices"
)

// Axis is one driver of a [Table] with the places at which the table has figures.
type Axis struct {
	Scale
	Driver int       // index into [Conditions.Drivers]
	At     []float64 // SI, rising; at least two
}

// Table is a duty against one driver, linear between its points, or against two, bilinear
// between those of a grid:
//
//	Q = (1−u)(1−v)·Q00 + u(1−v)·Q10 + (1−u)v·Q01 + uv·Q11,
//
// u and v the parts of the way from one place to the next. Outside its places nothing is
// known. Two points make a line.
type Table struct {
	Axes []Axis    // one or two
	Duty []float64 // W; of two axes row by row, a row for each place of the first
	// Uncertainty is the standard uncertainty of the duty as a fraction of it, which lasts.
	Uncertainty float64
}

// At interpolates. It is not known where a driver has no value or lies outside the table.
func (t Table) At(c Conditions) Expected {
	var place [2]int
	var part [2]float64
	for k := range t.Axes {
		a := &t.Axes[k]
		x, why := a.value(&c, a.Driver)
		if why != "" {
			return Expected{Why: why}
		}
		var inside bool
		if place[k], part[k], inside = a.find(x); !inside {
			return Expected{Why: a.outside(x, a.At[0], a.At[len(a.At)-1])}
		}
	}
	duty := t.between(place, part)
	return Expected{Known: true, Duty: duty, Lasting: t.Uncertainty * math.Abs(duty)}
}

// find returns the place at or below x, but for the last, and the part of the way to the next.
func (a *Axis) find(x float64) (place int, part float64, inside bool) {
	n := len(a.At)
	if !(x >= a.At[0] && x <= a.At[n-1]) {
		return 0, 0, false
	}
	i, found := slices.BinarySearch(a.At, x)
	if !found || i == n-1 {
		i--
	}
	return i, (x - a.At[i]) / (a.At[i+1] - a.At[i]), true
}

func (t *Table) between(place [2]int, part [2]float64) float64 {
	i, u := place[0], part[0]
	if len(t.Axes) == 1 {
		return (1-u)*t.Duty[i] + u*t.Duty[i+1]
	}
	n, j, v := len(t.Axes[1].At), place[1], part[1]
	row := func(i int) float64 { return (1-v)*t.Duty[i*n+j] + v*t.Duty[i*n+j+1] }
	return (1-u)*row(i) + u*row(i+1)
}

// Check says what about the table cannot be worked with.
func (t *Table) Check() error {
	want := 1
	if n := len(t.Axes); n < 1 || n > 2 {
		return fmt.Errorf("table against %d tags: one or two are wanted", n)
	}
	for k := range t.Axes {
		a := &t.Axes[k]
		want *= len(a.At)
		if len(a.At) < 2 {
			return fmt.Errorf("table has %d places of tag %q: at least two are wanted", len(a.At), a.Tag)
		}
		for i := 1; i < len(a.At); i++ {
			if !(a.At[i] > a.At[i-1]) {
				return fmt.Errorf("%s does not lie above %s: the places of tag %q must rise", a.Show(a.At[i]), a.Show(a.At[i-1]), a.Tag)
			}
		}
	}
	if len(t.Duty) != want {
		return fmt.Errorf("table has %d duties: its places want %d", len(t.Duty), want)
	}
	return nil
}
