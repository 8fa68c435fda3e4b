//go:build services

package main

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
	"testing"
	"time"
)

// light counts what a browser that knows nothing of the page yet has to fetch for the first one.
func (b *browser) light(t *testing.T, a *agentUnderTest) {
	x := b.tab(t, a.address)
	x.open("/")
	x.drawn()
	paths, bytes := x.requests()
	if len(paths) >= 15 || len(paths) < 4 || !(bytes < 150e3) || bytes < 5e3 {
		t.Errorf("the first page takes %d requests and %.0f bytes; allowed are 14 and 150 kB: %q", len(paths), bytes, paths)
	}
	t.Logf("the first page takes %d requests and %.0f bytes", len(paths), bytes)
}

// readout holds what a chart says of a point to the digits that its ± leaves.
func (b *browser) readout(t *testing.T, a *agentUnderTest) {
	x := b.tab(t, a.address)
	x.open("/loads/hot-water")
	const text = `(document.querySelector(".picker output")?.textContent ?? "")`
	x.until("a chart tells its newest point", text+`.includes("±")`)
	m := regexp.MustCompile(`duty (\d+)(\.\d+)? ± (\d+)(\.\d+)? kW`).FindStringSubmatch(eval[string](x, text))
	if m == nil {
		t.Fatalf("the chart says %q", eval[string](x, text))
	}
	if digits := strings.TrimLeft(m[3]+strings.TrimPrefix(m[4], "."), "0"); len(digits) != 2 || len(m[2]) != len(m[4]) {
		t.Errorf("the chart says %q: the ± is to have two digits, and the duty to end where it does", m[0])
	}
}

// shownBand is what a band shows.
type shownBand struct{ Load, Verdict, Duty, Spread, Unit string }

// shownSheet is the sheet of loads at one moment.
type shownSheet struct {
	At    time.Time
	Bands []shownBand
}

const readSheet = `(() => ({
	At: new Date(document.getElementById("at").dateTime).toISOString(),
	Bands: [...document.querySelectorAll("[data-load]")].map(b => ({
		Load: b.dataset.load, Verdict: b.querySelector(".verdict").textContent, Duty: b.querySelector(".duty").textContent,
		Spread: b.querySelector(".pm").textContent.replace(" ± ", ""), Unit: b.querySelector(".unit").textContent,
	})),
}))()`

// sameBeat reads page and metrics until both are of one beat: the metrics are read before and
// after, and the event time is the same in all three.
func (x *tab) sameBeat(a *agentUnderTest, after time.Time) (s shownSheet, metrics map[string]string) {
	x.Helper()
	eventually(x.T, "page and metrics are of one beat", func() error {
		var at [2]string
		for i := range at {
			all, err := a.series()
			if err != nil {
				return err
			}
			metrics, at[i] = all, all["heatreeve_event_timestamp_seconds"]
			if i == 0 {
				s = eval[shownSheet](x, readSheet)
			}
		}
		seconds, err := strconv.ParseFloat(at[0], 64)
		if err != nil || at[0] != at[1] || int64(seconds) != s.At.Unix() || !s.At.After(after) {
			return fmt.Errorf("metrics of %s to %s, page of %v", at[0], at[1], s.At)
		}
		return nil
	})
	return s, metrics
}

// figures holds what the page shows, beat by beat and in two units, to the metrics: each text
// within half of its last digit, which the ± tells.
func (b *browser) figures(t *testing.T, a *agentUnderTest) {
	for query, watts := range map[string]float64{"": 1e3, "?duty=Btu%2Fh": 1055.05585262 / 3600} { // Btu (IT): NIST SP 811, B.8
		x := b.tab(t, a.address)
		x.open("/" + query)
		var last time.Time
		compared, changed, before := 0, 0, ""
		for beats := 0; compared < 24 || changed < 4; beats++ {
			if beats == 100 {
				t.Fatalf("%q: in %d beats only %d figures compared, and %d changes seen", query, beats, compared, changed)
			}
			s, metrics := x.sameBeat(a, last)
			last = s.At
			if len(s.Bands) != 4 {
				t.Fatalf("%d bands", len(s.Bands))
			}
			for _, band := range s.Bands {
				compared += x.holds(band, metrics, watts)
			}
			if now := fmt.Sprint(s.Bands); now != before {
				before = now
				changed++
			}
		}
		t.Logf("%q: %d figures compared, %d changes seen", query, compared, changed)
	}
}

// holds compares one band, and returns how many figures were there to compare.
func (x *tab) holds(b shownBand, metrics map[string]string, watts float64) int {
	x.Helper()
	of := func(name string) float64 {
		v, err := strconv.ParseFloat(metrics["heatreeve_load_"+name+`{load="`+b.Load+`"}`], 64)
		if err != nil {
			return math.NaN()
		}
		return v / watts
	}
	if v := metrics[`heatreeve_load_verdict{load="`+b.Load+`",verdict="`+b.Verdict+`"}`]; v != "1" {
		x.Errorf("%s: the page says %q, which the metrics put at %q", b.Load, b.Verdict, v)
	}
	duty, spread := of("duty_watts"), 2*of("duty_uncertainty_watts")
	if b.Spread == "" {
		if idle := b.Duty == "0" && duty == 0; !idle && !(b.Duty == "–" && math.IsNaN(duty)) {
			x.Errorf("%s: the page says %q, the metrics %g", b.Load, b.Duty, duty)
		}
		return 0
	}
	duties, err := strconv.ParseFloat(b.Duty, 64)
	spreads, err2 := strconv.ParseFloat(b.Spread, 64)
	last := math.Pow10(int(math.Floor(math.Log10(spreads)+1e-9)) - 1)
	if err != nil || err2 != nil || !(math.Abs(duties-duty) <= last*0.5001) || !(math.Abs(spreads-spread) <= last*0.5001) {
		x.Errorf("%s: the page says %s ± %s %s, the metrics %g ± %g", b.Load, b.Duty, b.Spread, b.Unit, duty, spread)
	}
	if digits := strings.TrimLeft(strings.ReplaceAll(b.Spread, ".", ""), "0"); len(strings.TrimRight(digits, "0")) > 2 {
		x.Errorf("%s: ± %s shows more than two digits", b.Load, b.Spread)
	}
	return 1
}
