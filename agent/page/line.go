package page

import (
	"math"
	"strconv"

	"heatreeve/agent/loads"
	"heatreeve/agent/shown"
	"heatreeve/agent/view"
)

// line is a duty line drawn to scale: all places are percent of its length.
type line struct {
	Low, High           float64 // ends of the scale, in the unit of the reader
	Lens, Width         string  // centre and half of the lens; "" where there is no duty
	Notch               string  // what is expected; "" where there is nothing
	BracketA, BracketB  string  // of the allowance
	Zero                string  // where zero lies
	Ticks               []tick
	Taken               bool // the lens has the hue of heat taken
	low, high, toReader float64
}

type tick struct{ At, Text string }

// lineOf draws the line of load l as n tells.
func lineOf(n *now, l *view.Load, u shown.Units) line {
	low, high := reach(n, l)
	x := line{low: low, high: high, toReader: 1 / u.Duty.Factor}
	x.Low, x.High = low*x.toReader, high*x.toReader
	x.Zero = x.at(0)
	if n.figure.Measured() {
		x.Lens, x.Width = x.at(n.figure.Duty), x.half(coverageFactor*n.figure.Uncertainty)
	}
	if l.Design != 0 {
		a := math.Abs(l.Allow * l.Design)
		x.Notch, x.BracketA, x.BracketB = x.at(l.Design), x.at(l.Design-a), x.at(l.Design+a)
	}
	x.ticks(u)
	return x
}

// reach is the scale of a load's line, W: from zero to beyond what is expected, allowed and
// measured, and below zero where the duty goes there.
func reach(n *now, l *view.Load) (low, high float64) {
	spans := []float64{l.Design * (1 + l.Allow) * 1.2, l.Design * (1 - l.Allow)}
	if n.figure.Measured() {
		U := coverageFactor * n.figure.Uncertainty
		spans = append(spans, n.figure.Duty+U, n.figure.Duty-U)
	}
	if m := l.Means[len(loads.Windows)-1]; m.Coverage > 0 {
		spans = append(spans, m.Duty)
	}
	for _, s := range spans {
		if !math.IsNaN(s) && !math.IsInf(s, 0) {
			low, high = min(low, s), max(high, s)
		}
	}
	if high-low == 0 {
		return 0, 1000
	}
	step := stepOf(high - low)
	return math.Floor(low/step) * step, math.Ceil(high/step) * step
}

// stepOf is a round part of a span: it holds three to seven of them.
func stepOf(span float64) float64 {
	decade := math.Pow10(int(math.Floor(math.Log10(span))))
	for _, k := range [...]float64{0.2, 0.5, 1} {
		if span/(k*decade) <= 7 {
			return k * decade
		}
	}
	return 2 * decade
}

// ticks are round figures of the unit along the line.
func (x *line) ticks(u shown.Units) {
	step := stepOf(x.High - x.Low)
	decimals := max(0, -int(math.Floor(math.Log10(step)+1e-9)))
	first, longest := math.Ceil(x.Low/step-1e-9), 0
	for k := first; k*step <= x.High*(1+1e-9)+1e-12; k++ {
		text := shown.Rounded(k*step, decimals)
		x.Ticks, longest = append(x.Ticks, tick{x.at(k * step / x.toReader), text}), max(longest, len(text))
	}
	x.thin(int(first), longest+1)
}

// telephoneDigits stand side by side below a line on a screen of 360 px.
const telephoneDigits = 40

// thin leaves marks without a figure between those with one, where figures of so many digits
// would run into each other. The first mark is so many steps from zero, which keeps its figure.
func (x *line) thin(first, digits int) {
	every := 1 + (len(x.Ticks)*digits-1)/telephoneDigits
	for i := range x.Ticks {
		if (first+i)%every != 0 {
			x.Ticks[i].Text = ""
		}
	}
}

// at is where a duty lies, at the end where it is beyond.
func (x *line) at(w float64) string {
	return percent(100 * min(1, max(0, (w-x.low)/(x.high-x.low))))
}

// half is a length on the line.
func (x *line) half(w float64) string {
	return percent(100 * min(1, w/(x.high-x.low)))
}

func percent(x float64) string { return strconv.FormatFloat(x, 'f', 2, 64) + "%" }
