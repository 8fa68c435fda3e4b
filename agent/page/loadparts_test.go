package page

import (
	"context"
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/loads"
	"heatreeve/agent/shown"
	"heatreeve/agent/view"
)

// percentOf reads "12.5%" back.
func percentOf(t *testing.T, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(strings.TrimSuffix(text, "%"), 64)
	if err != nil || !strings.HasSuffix(text, "%") {
		t.Fatalf("%q is no part of the width", text)
	}
	return x
}

func pixels(t *testing.T, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// The bars on the page have the heights of the report: the axis goes from 0 to 3 MWh over
// barsHeight, and hour i moved i/10 MWh.
func TestHeatOnThePage(t *testing.T) {
	page := parsed(t, sheetOf(t, newFakePlant(t), "hot-water", ""))
	heat := byID(t, page, "heat")
	i := 0
	for _, r := range elements(heat, "rect") {
		if attribute(r, "class") != "given" {
			continue
		}
		if got, want := pixels(t, attribute(r, "height")), barsHeight/3.0*float64(i)/10; math.Abs(got-want) > 0.051 { // written to a tenth
			t.Errorf("hour %d is %g high, want %g", i, got, want)
		}
		if got, want := percentOf(t, attribute(r, "x")), 100*(float64(i)+0.14)/24; math.Abs(got-want) > 0.001 {
			t.Errorf("hour %d at %g %%, want %g %%", i, got, want)
		}
		i++
	}
	if i != 24 {
		t.Errorf("%d bars", i)
	}
	tells(t, heat, "2 Dec 11:00 +00:00 2.300 0.000 0.020", "75.0 % 12.5 %", "together 27.60 0.00 0.56")
}

func TestHeatInOtherUnits(t *testing.T) {
	page := parsed(t, sheetOf(t, newFakePlant(t), "hot-water", "heat=GJ"))
	tells(t, byID(t, page, "heat"), "given, GJ", "together 99.4 0.0 2.0") // 27.6 MWh × 3.6
}

// A share is as long as its part of the variance, and all of them are the whole.
func TestSharesOnThePage(t *testing.T) {
	page := parsed(t, sheetOf(t, newFakePlant(t), "hot-water", ""))
	var wide []string
	for _, r := range elements(byID(t, page, "uncertainty"), "rect") {
		if attribute(r, "class") == "share" {
			wide = append(wide, attribute(r, "width"))
		}
	}
	if fmt.Sprint(wide) != "[64% 36% 64% 36%]" {
		t.Errorf("bars %v", wide)
	}
	tells(t, byID(t, page, "uncertainty"), "The newest figure: 600 ± 10 kW", "flow 64.0 % ± 8.0 kW", "27.60 ± 0.56 MWh")
}

// Each point of the curve is the cp of the load's fluid at its temperature, and the operating
// span is marked from 90 °C to 130 °C on an axis of as much again.
func TestSpecificHeatOnThePage(t *testing.T) {
	p := newFakePlant(t)
	page := parsed(t, sheetOf(t, p, "hot-water", ""))
	cp := byID(t, page, "cp")
	tells(t, cp, "a kilogram of water", "at 7.000 bar absolute", "coldest today 90.00", "warmest today 130.00", "IAPWS")
	var curve string
	for _, x := range elements(cp, "path") {
		if attribute(x, "class") == "curve" {
			curve = attribute(x, "d")
		}
	}
	var marks []float64
	for _, x := range elements(elements(cp, "svg")[0], "text") {
		marks = append(marks, pixels(t, text(x)))
	}
	lo, hi := marks[0], marks[len(marks)-1]
	xs, ys := points(t, curve)
	if len(xs) != cpPoints {
		t.Fatalf("%d points", len(xs))
	}
	_, fluid := p.site.Loads[0].Fluid()
	for i := range xs {
		T := 363.15 - 20 + 80*xs[i]
		at, err := fluid.At(T, 7e5)
		if err != nil {
			t.Fatal(err)
		}
		got := lo + (hi-lo)*(1-ys[i]/curveHeight)
		if math.Abs(got-at.Cp) > 0.2 { // x is written to a thousandth of the width, y to 0.01 px
			t.Errorf("at %g K %g, want %g", T, got, at.Cp)
		}
	}
	for _, x := range elements(cp, "rect") {
		if got := attribute(x, "x") + " " + attribute(x, "width"); attribute(x, "class") == "zone" && got != "25% 50%" {
			t.Errorf("the operating span is at %s", got)
		}
	}
}

// A load that is blind has no pressure: the curve is then for that of its design, so that hot
// water is no steam. Where the fluid is another phase at a temperature, that is told.
func TestSpecificHeatOfABlindLoad(t *testing.T) {
	p := newFakePlant(t)
	p.snapshot.Loads[0].Figure = loads.Figure{Fault: loads.Stale}
	tells(t, byID(t, parsed(t, sheetOf(t, p, "hot-water", "")), "cp"), "at 7.009 bar absolute", "warmest today 130.00 ± 0.47 °C 4264 ± 10 J/(kg K)")
	p.site.Loads[0].Design.Pressure = 0
	tells(t, byID(t, parsed(t, sheetOf(t, p, "hot-water", "")), "cp"), "at 1.013 bar absolute", "°C water: pressure 101.325 kPa is below")
}

// A vessel has one temperature, and neither inlet nor flow.
func TestSheetOfAVessel(t *testing.T) {
	p := fakePlantOf(t, "ostrel-maltings.yaml")
	for i := range p.site.Loads {
		if p.site.Loads[i].Vessel == nil {
			continue
		}
		p.snapshot.Loads[i].Figure = loads.Figure{Duty: 1e3, Uncertainty: 10, Content: 333.15}
		page := parsed(t, sheetOf(t, p, p.site.Loads[i].Name, ""))
		tells(t, byID(t, page, "cp"), "where the load ran now", "now 60.0")
		for _, chart := range elements(byID(t, page, "course"), "figure") {
			if kind := attribute(chart, "data-chart"); kind != "duty" {
				t.Errorf("a chart of %s", kind)
			}
		}
		return
	}
	t.Error("no vessel")
}

// A flow meter that is good to 0.5 % of its reading, as a rectangular distribution, has an
// expanded uncertainty of 0.577 % (JCGM 100:2008, 4.3.7), whether or not there is a figure now.
func TestDigitsOfAFlow(t *testing.T) {
	p := newFakePlant(t)
	for _, f := range []loads.Figure{p.snapshot.Loads[0].Figure, {Fault: loads.Stale}} {
		p.snapshot.Loads[0].Figure = f
		tells(t, byID(t, parsed(t, sheetOf(t, p, "hot-water", "")), "course"), "mass flow 3.700 3.700 3.700 0.021 kg/s")
	}
}

func TestBusyAgent(t *testing.T) {
	p := newFakePlant(t)
	p.fault = fmt.Errorf("wait: %w", context.DeadlineExceeded)
	tells(t, byID(t, parsed(t, sheetOf(t, p, "hot-water", "")), "heat"), "Not told: the agent is busy with other questions")
}

// The resistance of 4 K/MW rises by 0.5 K/MW a day: it comes to 10 K/MW twelve days after the
// second of December. The line of the picture passes the allowance where the date is marked.
func TestFoulingOnThePage(t *testing.T) {
	page := parsed(t, sheetOf(t, newFakePlant(t), "hot-water", ""))
	x := byID(t, page, "exchanger")
	tells(t, x, "The load is the hot side; the other one is milk", "conductance UA 16.00 ± 0.64 kW/K", "left of it 94.0 ± 3.8 %", "fouling resistance 0.00400 ± 0.00020 K/kW",
		"about 14 December 2026, between 13 December 2026 and 14 December 2026 (95 %)")
	var limit, marked float64
	for _, l := range elements(x, "line") {
		switch attribute(l, "class") {
		case "limit":
			limit = pixels(t, attribute(l, "y1"))
		case "zone-edge":
			marked = percentOf(t, attribute(l, "x1")) / 100 // the last one is of the date itself
		}
	}
	for _, d := range elements(x, "path") {
		if attribute(d, "class") != "ahead" {
			continue
		}
		xs, ys := points(t, attribute(d, "d"))
		n := len(xs) - 1
		y := ys[0] + (ys[n]-ys[0])*(marked-xs[0])/(xs[n]-xs[0])
		if math.Abs(y-limit) > 0.2 {
			t.Errorf("at the date the line is at %g, the allowance at %g", y, limit)
		}
		return
	}
	t.Error("no line ahead")
}

func TestWhenFoulingIsReached(t *testing.T) {
	x := view.Exchanger{Allowance: 1e-5, Standing: fouledStanding(midday.UnixNano())}
	for _, tt := range []struct {
		change func(*view.Exchanger)
		want   string
	}{
		{func(x *view.Exchanger) { x.Allowance = 0 }, "The site file allows no fouling"},
		{func(x *view.Exchanger) { x.Course.Days = 0 }, "There is no course yet"},
		{func(x *view.Exchanger) { x.Course.Level = 2e-5 }, "Fouling is beyond its allowance."},
		{func(x *view.Exchanger) { x.Course.Slope = -1e-7 }, "Fouling does not grow"},
		{func(x *view.Exchanger) { x.Course.Scatter = 1e-11 }, "perhaps never (95 %)."},
	} {
		y := x
		tt.change(&y)
		if got := reached(&y); !strings.Contains(got, tt.want) {
			t.Errorf("%q, want %q", got, tt.want)
		}
	}
}

// Of all that happened, a load's sheet has what is its own, newest first.
func TestEventsOfALoad(t *testing.T) {
	p := newFakePlant(t)
	until := midday.Add(-time.Hour)
	p.events.Events = []answer.Event{
		{At: midday.Add(-2 * time.Hour), Until: &until, Kind: "gap", Subject: "TT-201", Text: "its own tag"},
		{At: midday.Add(-90 * time.Minute), Until: &until, Kind: "gap", Subject: "TT-301", Text: "another's"},
		{At: midday.Add(-80 * time.Minute), Kind: "warning", Subject: "milk-heater", Text: "its exchanger"},
		{At: midday.Add(-70 * time.Minute), Kind: "start", Text: "the agent"},
	}
	page := parsed(t, sheetOf(t, p, "hot-water", ""))
	events := byID(t, page, "events")
	tells(t, events, "10:50 +00:00 still start the agent Wed 2 Dec 2026 10:40 +00:00 still warning milk-heater its exchanger Wed 2 Dec 2026 10:00 +00:00 1 h gap TT-201 its own tag")
	if strings.Contains(text(events), "another's") {
		t.Error("an event of another load")
	}
	for range 2 * mostEvents {
		p.events.Events = append(p.events.Events, answer.Event{At: midday, Kind: "start"})
	}
	page = parsed(t, sheetOf(t, p, "hot-water", ""))
	tells(t, byID(t, page, "events"), "43 earlier ones are left out")
	if n := len(elements(byID(t, page, "events"), "tr")); n != mostEvents+1 {
		t.Errorf("%d rows", n)
	}
}

// A browser writes as many digits as the server would.
func TestScale(t *testing.T) {
	u := shown.Usual()
	for _, tt := range []struct {
		value, expanded float64
		want            int
	}{{604e3, 10e3, 0}, {604e3, 4e3, 1}, {604e3, 400, 2}, {604e6, 123e3, -1}, {604e6, 0, -2}, {604e3, 0, 1}} {
		if got := scaleOf(u.Duty, tt.value, tt.expanded); got.Decimals != tt.want || got.Factor != 1e3 || got.Unit != "kW" || got.Spread != tt.expanded/1e3 {
			t.Errorf("%g ± %g: %+v, want %d decimals", tt.value, tt.expanded, got, tt.want)
		}
	}
}

func TestWords(t *testing.T) {
	for d, want := range map[time.Duration]string{time.Second: "1 s", 250 * time.Millisecond: "0.25 s", 90 * time.Second: "1 min 30 s", 25 * time.Hour: "1 d 1 h", 2*time.Hour + 30*time.Second: "2 h"} {
		if got := duration(d); got != want {
			t.Errorf("%v: %q, want %q", d, got, want)
		}
	}
	for x, want := range map[float64]string{0: "0.0 %", 1: "100.0 %", 0.9999: "above 99.9 %", 0.0002: "below 0.1 %", 0.123: "12.3 %"} {
		if got := percentText(x); got != want {
			t.Errorf("%g: %q, want %q", x, got, want)
		}
	}
}

// However many events there are, the newest of the load's own are kept, and no more held than
// twice as many.
func TestNewestEvents(t *testing.T) {
	for _, n := range []int{0, 1, mostEvents, mostEvents + 1, 2 * mostEvents, 2*mostEvents + 1, 777} {
		x := newestOf{subjects: []string{"own"}}
		for i := range n {
			x.take(&answer.Event{At: midday.Add(time.Duration(i) * time.Second), Subject: "own"})
			x.take(&answer.Event{At: midday, Subject: "another"})
			if cap(x.kept) > 4*mostEvents {
				t.Fatalf("room for %d events", cap(x.kept))
			}
		}
		all := x.all()
		if len(all) != min(n, mostEvents) || x.left != n-len(all) {
			t.Errorf("of %d: %d, and %d left out", n, len(all), x.left)
		}
		for i := range all {
			if want := midday.Add(time.Duration(n-1-i) * time.Second); !all[i].At.Equal(want) {
				t.Errorf("of %d, place %d: %v, want %v", n, i, all[i].At, want)
			}
		}
	}
}

// Where only hours are left of a time that does not begin with one, they reach beyond it, and are
// not more than all of it.
func TestCoverageOfHoursThatReachBeyond(t *testing.T) {
	p := &coursePart{}
	p.coverage(&answer.Series{Measured: []float64{3600, 2700}, Bridged: []float64{0, 900}, Accounted: midday}, midday.Add(-time.Hour), midday)
	if p.Measured != "87.5 %" || p.Bridged != "12.5 %" || p.Missing != "0.0 %" {
		t.Errorf("measured %s, bridged %s, missing %s", p.Measured, p.Bridged, p.Missing)
	}
}

// The period that has not ended yet leads to the present, not to a time of which a part is missing
// because it is to come.
func TestPeriodUnderWayLeadsToThePresent(t *testing.T) {
	p := newFakePlant(t)
	l := &p.report.Loads[0]
	l.Periods = append(l.Periods, answer.PeriodReport{Start: midday, End: midday.Add(time.Hour), Given: 3.6e9, Measured: 600, Coverage: 0.17})
	links := elements(byID(t, parsed(t, sheetOf(t, p, "hot-water", "")), "heat"), "a")
	underWay := 0
	for _, a := range links {
		to := attribute(a, "href")
		if strings.Contains(to, "12-02T13%3A00") {
			t.Errorf("leads to %s", to)
		}
		if strings.Contains(to, "span=1h") && !strings.Contains(to, "to=") {
			underWay++
		}
	}
	if underWay == 0 {
		t.Error("no link leads to the present")
	}
}

// What is to come, or is not on disk yet, is not missing.
func TestCoverageGoesAsFarAsTheHistory(t *testing.T) {
	p := &coursePart{}
	p.coverage(&answer.Series{Measured: []float64{3240}, Bridged: []float64{0}, Accounted: midday.Add(-6 * time.Minute)}, midday.Add(-time.Hour), midday)
	if p.Measured != "100.0 %" || p.Missing != "0.0 %" {
		t.Errorf("measured %s, missing %s", p.Measured, p.Missing)
	}
}
