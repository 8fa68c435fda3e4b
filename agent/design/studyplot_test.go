package design

import (
	"image/color"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
)

// plotsFolder names a folder that the pictures of the study are kept in.
const plotsFolder = "HEATREEVE_PLOTS"

var (
	learnedColour  = color.RGBA{B: 200, A: 255}
	followedColour = color.RGBA{R: 200, A: 255}
	expectedColour = color.RGBA{G: 130, A: 255}
)

// drawLoop draws duty against outdoor temperature, duty and what is expected over time, the
// deviation with its dead band, and the sums: what was learned from blue, the rest red.
func drawLoop(t *testing.T, name string, all []hourly) {
	t.Helper()
	half := len(all) / 2
	days := func(i int) float64 { return float64(all[i].At-all[0].At) / 86400e9 }
	var weather, duty, deviation [2]plotter.XYs
	var expected, high, low, over, under plotter.XYs
	for i := range all {
		x, k := &all[i], 0
		if i >= half {
			k = 1
		}
		weather[k] = append(weather[k], plotter.XY{X: x.Drivers[0] - 273.15, Y: x.Duty / 1e3})
		duty[k] = append(duty[k], plotter.XY{X: days(i), Y: x.Duty / 1e3})
		if !x.Expected.Known {
			continue
		}
		deviation[k] = append(deviation[k], plotter.XY{X: days(i), Y: x.Deviation / 1e3})
		expected = append(expected, plotter.XY{X: days(i), Y: x.Expected.Duty / 1e3})
		band := dead * x.Expected.DeviationLasting / 1e3
		over, under = append(over, plotter.XY{X: days(i), Y: band}), append(under, plotter.XY{X: days(i), Y: -band})
		if k == 1 {
			high = append(high, plotter.XY{X: days(i), Y: x.Drift.High})
			low = append(low, plotter.XY{X: days(i), Y: -x.Drift.Low})
		}
	}
	panels := [][]*plot.Plot{
		{panel(t, "duty, kW, against outdoor temperature, °C", weather, nil)},
		{panel(t, "duty and expected duty, kW, over days", duty, []plotter.XYs{expected})},
		{panel(t, "deviation and dead band, kW", deviation, []plotter.XYs{over, under})},
		{panel(t, "sums of the CUSUM", [2]plotter.XYs{}, []plotter.XYs{high, low})},
	}
	img := vgimg.New(24*vg.Centimeter, 36*vg.Centimeter)
	dc := draw.New(img)
	for i, row := range plot.Align(panels, draw.Tiles{Rows: len(panels), Cols: 1}, dc) {
		panels[i][0].Draw(row[0])
	}
	dir := os.Getenv(plotsFolder)
	if dir == "" {
		dir = t.TempDir()
	}
	path := filepath.Join(dir, strings.TrimSuffix(filepath.Base(name), ".csv")+".png")
	f, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if _, err := (vgimg.PngCanvas{Canvas: img}).WriteTo(f); err != nil {
		t.Fatal(err)
	}
}

func panel(t *testing.T, title string, points [2]plotter.XYs, lines []plotter.XYs) *plot.Plot {
	t.Helper()
	p := plot.New()
	p.Title.Text = title
	for k, xys := range points {
		if len(xys) == 0 {
			continue
		}
		s, err := plotter.NewScatter(xys)
		if err != nil {
			t.Fatal(err)
		}
		s.GlyphStyle.Radius, s.GlyphStyle.Color = vg.Points(1.2), []color.Color{learnedColour, followedColour}[k]
		p.Add(s)
	}
	for _, xys := range lines {
		if len(xys) == 0 {
			continue
		}
		l, err := plotter.NewLine(xys)
		if err != nil {
			t.Fatal(err)
		}
		l.Color = expectedColour
		p.Add(l)
	}
	return p
}
