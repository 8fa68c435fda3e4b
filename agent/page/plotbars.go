package page

import "math"

// heatBar is what a bar tells, in the unit of the picture.
type heatBar struct {
	Given, Taken, Expanded   float64
	Measured, Bridged, Whole float64 // s
	Label                    string  // below the bar; empty for none
	Title, Link              string
}

// bars is a picture of heat by periods. Where there is heat of both directions, what was taken
// hangs down.
type bars struct {
	Label               string
	Height, Base, Strip px // of the field, where zero lies, and where the strip of coverage begins
	Lines               []mark
	Bars                []bar
	Below               []mark
	Unit                string
}

// bar is a period: the rectangles of its heat, its whisker and its coverage.
type bar struct {
	X, Width                part
	GivenY, GivenHeight     px
	TakenY, TakenHeight     px
	Middle                  part
	WhiskerFrom, WhiskerTo  px
	Whisker                 bool
	MeasuredX, MeasuredWide part
	BridgedX, BridgedWide   part
	Title, Link             string
}

const (
	barsHeight  = 170
	stripGap    = 6
	stripHeight = 6
)

// drawBars lays out bars of equal width.
func drawBars(label, unit string, all []heatBar) *bars {
	b := &bars{Label: label, Unit: unit, Height: barsHeight, Strip: barsHeight + stripGap}
	y, down := barsAxis(all)
	b.Lines, b.Base = y.lines(barsHeight), y.down(0, barsHeight)
	slot := 1 / float64(max(len(all), 1))
	for i := range all {
		h := &all[i]
		x := float64(i) * slot
		b.Bars = append(b.Bars, drawBar(h, y, down, x, slot))
		if h.Label != "" {
			b.Below = append(b.Below, across(x+slot/2, h.Label))
		}
	}
	return b
}

// barsAxis spans what the bars and their whiskers reach. down tells that what was taken hangs.
func barsAxis(all []heatBar) (y axis, down bool) {
	var up, below float64
	given, taken := false, false
	for i := range all {
		given, taken = given || all[i].Given > 0, taken || all[i].Taken > 0
	}
	down = given && taken
	for i := range all {
		_, _, lo, hi := all[i].reach(down)
		if up = max(up, hi); down {
			below = min(below, lo)
		}
	}
	if up == 0 && below == 0 {
		up = 1
	}
	return roundAxis(below, up, 4), down
}

// reach tells where the bar's heat ends, and the whisker about the end of the larger one.
func (h *heatBar) reach(down bool) (given, taken, lo, hi float64) {
	given, taken = h.Given, h.Taken
	if down {
		taken = -taken
	}
	end := given
	if math.Abs(taken) > given {
		end = taken
	}
	return given, taken, min(given, taken, end-h.Expanded, 0), max(given, taken, end+h.Expanded)
}

func drawBar(h *heatBar, y axis, down bool, x, slot float64) bar {
	given, taken, _, _ := h.reach(down)
	base := y.down(0, barsHeight)
	r := bar{X: part(x + 0.14*slot), Width: part(0.72 * slot), Middle: part(x + slot/2), Title: h.Title, Link: h.Link}
	r.GivenY = y.down(given, barsHeight)
	r.GivenHeight = base - r.GivenY
	r.TakenY = min(y.down(taken, barsHeight), base)
	r.TakenHeight = px(math.Abs(float64(y.down(taken, barsHeight) - base)))
	end := given
	if math.Abs(taken) > given {
		end = taken
	}
	if h.Expanded > 0 && h.Measured > 0 {
		r.Whisker = true
		r.WhiskerFrom, r.WhiskerTo = y.down(end+h.Expanded, barsHeight), min(y.down(end-h.Expanded, barsHeight), barsHeight)
	}
	if h.Whole > 0 {
		r.MeasuredX, r.MeasuredWide = r.X, r.Width*part(h.Measured/h.Whole)
		r.BridgedX, r.BridgedWide = r.X+r.MeasuredWide, r.Width*part(h.Bridged/h.Whole)
	}
	return r
}
