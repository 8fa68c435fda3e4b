package page

import (
	"math"
	"strconv"
	"strings"

	"heatreeve/agent/shown"
)

// Pictures are SVG without a view box: lengths across are parts of the width, so that a picture
// fits a telephone and a wide screen alike, and lengths down are pixels, so that its texts keep
// their size. A curve has a view box of its own, which is stretched.

// px is a length in pixels.
type px float64

func (p px) String() string { return brief(float64(p), 1) }

// part is a length across, 0 to 1 of the width.
type part float64

func (p part) String() string { return brief(100*float64(p), 3) + "%" }

// brief writes x without zeros at the end.
func brief(x float64, decimals int) string {
	text := shown.Rounded(x, decimals)
	if strings.Contains(text, ".") {
		text = strings.TrimRight(strings.TrimRight(text, "0"), ".")
	}
	return text
}

// mark is a text beside a place on an axis.
type mark struct {
	X      part
	Y      px
	Anchor string // start, middle or end
	Text   string
}

// across is a mark on the axis below; at the
// ends its text stays within the picture.
func across(x float64, text string) mark {
	anchor := "middle"
	switch {
	case x <= 0:
		anchor = "start"
	case x > 0.97:
		anchor = "end"
	}
	return mark{X: part(x), Anchor: anchor, Text: text}
}

// axis is a straight scale with round marks.
type axis struct {
	From, To float64
	Marks    []float64
	Decimals int // of the marks
}

// roundAxis spans lo to hi in steps of 1, 2 or 5 times a power of ten, about so many. What is not
// finite, or turned round, is an axis from 0 to 1.
func roundAxis(lo, hi float64, steps int) axis {
	if !(lo <= hi) || math.IsInf(lo, 0) || math.IsInf(hi, 0) {
		lo, hi = 0, 1
	}
	if hi-lo < 1e-9*max(math.Abs(lo), math.Abs(hi), 1e-9) {
		half := max(math.Abs(lo)*0.01, 1e-9)
		lo, hi = lo-half, hi+half
	}
	step := roundStep((hi - lo) / float64(max(steps, 1)))
	first, last := math.Floor(lo/step+1e-9), math.Ceil(hi/step-1e-9)
	a := axis{From: first * step, To: last * step, Decimals: decimalsOf(step)}
	for k := first; k <= last; k++ {
		a.Marks = append(a.Marks, k*step)
	}
	return a
}

// roundStep is the next 1, 2 or 5 times a power of ten.
func roundStep(x float64) float64 {
	ten := math.Pow(10, math.Floor(math.Log10(x)))
	for _, m := range [...]float64{1, 2, 5} {
		if x <= m*ten*(1+1e-9) {
			return m * ten
		}
	}
	return 10 * ten
}

func decimalsOf(step float64) int {
	return max(0, -int(math.Floor(math.Log10(step)+1e-9)))
}

// at is where x lies between the ends, 0 to 1.
func (a axis) at(x float64) float64 { return (x - a.From) / (a.To - a.From) }

// down is how far below the upper edge x lies in a picture so high.
func (a axis) down(x float64, height px) px { return height * px(1-a.at(x)) }

// lines are the marks of an upright axis, as texts beside it.
func (a axis) lines(height px) (all []mark) {
	for _, x := range a.Marks {
		all = append(all, mark{Y: a.down(x, height), Anchor: "end", Text: shown.Rounded(x, a.Decimals)})
	}
	return all
}

// wide is the view box of a curve across.
const wide = 1000

// curvePath is the path through points, x from 0 to 1 and y in pixels; it begins anew behind
// one that is not finite.
func curvePath(xs []float64, ys []px) string {
	var b strings.Builder
	pen := "M"
	for i, x := range xs {
		if y := float64(ys[i]); math.IsNaN(x) || math.IsNaN(y) || math.IsInf(y, 0) {
			pen = "M"
			continue
		}
		b.WriteString(pen + strconv.FormatFloat(wide*x, 'f', 1, 64) + " " + strconv.FormatFloat(float64(ys[i]), 'f', 2, 64))
		pen = "L"
	}
	return b.String()
}

// bandPath is the closed path between two curves over the same places.
func bandPath(xs []float64, upper, lower []px) string {
	if len(xs) < 2 {
		return ""
	}
	back, ys := make([]float64, 0, 2*len(xs)), make([]px, 0, 2*len(xs))
	back, ys = append(back, xs...), append(ys, upper...)
	for i := len(xs) - 1; i >= 0; i-- {
		back, ys = append(back, xs[i]), append(ys, lower[i])
	}
	return curvePath(back, ys) + "Z"
}
