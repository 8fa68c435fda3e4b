package page

import (
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"
)

func TestRoundAxis(t *testing.T) {
	for _, tt := range []struct {
		lo, hi   float64
		steps    int
		marks    []float64
		decimals int
	}{
		{0, 2.3, 4, []float64{0, 1, 2, 3}, 0},
		{0, 640, 4, []float64{0, 200, 400, 600, 800}, 0},
		{4189, 4263, 4, []float64{4180, 4200, 4220, 4240, 4260, 4280}, 0},
		{-0.03, 0.04, 4, []float64{-0.04, -0.02, 0, 0.02, 0.04}, 2},
		{math.NaN(), 1, 2, []float64{0, 0.5, 1}, 1},
		{5, 1, 2, []float64{0, 0.5, 1}, 1},
	} {
		a := roundAxis(tt.lo, tt.hi, tt.steps)
		same := slices.EqualFunc(a.Marks, tt.marks, func(x, y float64) bool { return math.Abs(x-y) < 1e-9 })
		if !same || a.Decimals != tt.decimals || a.From != a.Marks[0] || a.To != a.Marks[len(a.Marks)-1] {
			t.Errorf("%g to %g: %+v, want marks %v with %d decimals", tt.lo, tt.hi, a, tt.marks, tt.decimals)
		}
	}
	if a := roundAxis(7, 7, 4); !(a.From < 7 && a.To > 7) {
		t.Errorf("a single value: %+v", a)
	}
}

func TestLengthsAreWrittenShort(t *testing.T) {
	for got, want := range map[string]string{px(12.34).String(): "12.3", px(170).String(): "170", part(1.0 / 3).String(): "33.333%", part(0).String(): "0%", part(1).String(): "100%"} {
		if got != want {
			t.Errorf("%q, want %q", got, want)
		}
	}
}

// A curve that has a hole begins anew behind it.
func TestCurvePath(t *testing.T) {
	nan := px(math.NaN())
	if got, want := curvePath([]float64{0, 0.25, 0.5, 0.75, 1}, []px{1, 2, nan, 3, 4}), "M0.0 1.00L250.0 2.00M750.0 3.00L1000.0 4.00"; got != want {
		t.Errorf("%s, want %s", got, want)
	}
	if got, want := bandPath([]float64{0, 1}, []px{1, 2}, []px{5, 6}), "M0.0 1.00L1000.0 2.00L1000.0 6.00L0.0 5.00Z"; got != want {
		t.Errorf("%s, want %s", got, want)
	}
}

// Heights are in proportion to the heat, whiskers to its uncertainty, and the strip to the time.
func TestBars(t *testing.T) {
	b := drawBars("", "MWh", []heatBar{
		{Given: 3, Expanded: 0.5, Measured: 1800, Bridged: 900, Whole: 3600, Label: "a"},
		{Given: 1.5, Measured: 3600, Whole: 3600},
		{Whole: 3600},
	})
	perUnit := float64(b.Base) / 4 // the axis goes from 0 to 4
	if b.Base != barsHeight || len(b.Lines) != 5 || b.Lines[4].Text != "4" || b.Lines[4].Y != 0 {
		t.Fatalf("axis: base %v, lines %v", b.Base, b.Lines)
	}
	for i, want := range []float64{3, 1.5, 0} {
		if got := float64(b.Bars[i].GivenHeight) / perUnit; math.Abs(got-want) > 1e-9 || b.Bars[i].TakenHeight != 0 {
			t.Errorf("bar %d is %g high, want %g", i, got, want)
		}
	}
	one := &b.Bars[0]
	if got := float64(one.WhiskerTo-one.WhiskerFrom) / perUnit; math.Abs(got-1) > 1e-9 || !one.Whisker || b.Bars[2].Whisker {
		t.Errorf("whisker of %g, want 1: twice the expanded uncertainty; and none where nothing was measured", got)
	}
	if one.MeasuredWide != one.Width/2 || one.BridgedWide != one.Width/4 || one.BridgedX != one.X+one.Width/2 {
		t.Errorf("strip: %+v", one)
	}
	if len(b.Below) != 1 || b.Below[0].Text != "a" || math.Abs(float64(b.Below[0].X)-1.0/6) > 1e-9 {
		t.Errorf("labels: %+v", b.Below)
	}
}

// Where there is heat of both directions, what was taken hangs; alone, it stands.
func TestBarsBothWays(t *testing.T) {
	b := drawBars("", "MWh", []heatBar{{Given: 2, Measured: 1}, {Taken: 1, Measured: 1}})
	if hung := b.Bars[1]; hung.TakenY != b.Base || math.Abs(float64(hung.TakenHeight)*2-float64(b.Bars[0].GivenHeight)) > 1e-9 {
		t.Errorf("base %v, bars %+v", b.Base, b.Bars)
	}
	b = drawBars("", "MWh", []heatBar{{Taken: 1, Measured: 1}})
	if stood := b.Bars[0]; stood.TakenY+stood.TakenHeight != b.Base || stood.TakenHeight != barsHeight {
		t.Errorf("base %v, bar %+v", b.Base, stood)
	}
}

// points reads a path back, in the view box.
func points(t *testing.T, path string) (xs, ys []float64) {
	t.Helper()
	for _, pair := range strings.FieldsFunc(path, func(r rune) bool { return strings.ContainsRune("MLZ", r) }) {
		a, b, ok := strings.Cut(pair, " ")
		x, err1 := strconv.ParseFloat(a, 64)
		y, err2 := strconv.ParseFloat(b, 64)
		if !ok || err1 != nil || err2 != nil {
			t.Fatalf("path %q", path)
		}
		xs, ys = append(xs, x/wide), append(ys, y)
	}
	return xs, ys
}
