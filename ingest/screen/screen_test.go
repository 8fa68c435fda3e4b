package screen

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"heatreeve/ingest/quality"
)

const second = int64(1e9)

// begin is some instant.
const begin = 1_700_000_000 * second

// judged returns the marks of readings at intervals, and which are set aside.
func judged(l Limits, every int64, values ...float64) (marks []quality.Mark, aside []bool) {
	var s State
	for i, v := range values {
		m, a := l.Judge(&s, begin+int64(i)*every, v)
		marks, aside = append(marks, m), append(aside, a)
	}
	return marks, aside
}

func marksOf(m quality.Mark, n int, at ...int) []quality.Mark {
	all := make([]quality.Mark, n)
	for _, i := range at {
		all[i] = m
	}
	return all
}

func TestPlausible(t *testing.T) {
	l := Limits{Low: 278.15, High: 368.15, HasRange: true}
	got, aside := judged(l, second, 278.15, 278.14, 300, 368.15, 368.16, math.NaN())
	want := marksOf(quality.Implausible, 6, 1, 4, 5)
	if !slices.Equal(got, want) || slices.Contains(aside, true) {
		t.Errorf("%v, aside %v; want %v", got, aside, want)
	}
}

// At 2 K/s and readings each 5 s, 10 K may come at one time.
func TestTooFast(t *testing.T) {
	l := Limits{Fastest: 2}
	for _, tt := range []struct {
		name   string
		values []float64
		fast   []int
	}{
		{"a ramp at the limit", []float64{300, 310, 320, 330}, nil},
		{"one reading astray", []float64{300, 311, 300, 301}, []int{1}},
		{"two, on different levels", []float64{300, 330, 270, 300}, []int{1, 2}},
		{"a step is accepted with the third", []float64{300, 330, 331, 330, 330, 331}, []int{1, 2}},
		{"what does not agree begins the row again", []float64{300, 335, 335, 370, 371, 370, 371}, []int{1, 2, 3, 4}},
		{"back before the third", []float64{300, 330, 331, 300, 330, 331, 330}, []int{1, 2, 4, 5}},
	} {
		if got, want := first(judged(l, 5*second, tt.values...)), marksOf(quality.TooFast, len(tt.values), tt.fast...); !slices.Equal(got, want) {
			t.Errorf("%s: %v, want %v", tt.name, got, want)
		}
	}
	// Of numbers that step by 0.5 two may lie a step further apart.
	l = Limits{Fastest: 0.01, Resolution: 0.5}
	if got, want := first(judged(l, 5*second, 300, 300.5, 301, 302.1)), marksOf(quality.TooFast, 4, 3); !slices.Equal(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
}

func first(m []quality.Mark, _ []bool) []quality.Mark { return m }

// Readings each minute that stay within a step are stuck from half an hour on, until they
// move.
func TestStuck(t *testing.T) {
	l := Limits{StuckAfter: 30 * 60 * second, Resolution: 0.1}
	var values []float64
	for i := range 40 {
		values = append(values, 273.15+60+0.1*float64(i%2))
	}
	values = append(values, 273.15+60.2, 273.15+60.2)
	var stuck []int
	for i := 30; i < 40; i++ {
		stuck = append(stuck, i)
	}
	if got, want := first(judged(l, 60*second, values...)), marksOf(quality.Stuck, len(values), stuck...); !slices.Equal(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
	for i := range values {
		values[i] = 0.1 * float64(i%2)
	}
	if got := first(judged(l, 60*second, values[:40]...)); slices.Contains(got, quality.Stuck) {
		t.Errorf("a flow of nothing: %v", got)
	}
	if got := first(judged(l, 3600*second, 300, 300, 300, 300)); !slices.Equal(got, marksOf(quality.Stuck, 4, 2, 3)) {
		t.Errorf("each hour: %v, want three readings to tell", got)
	}
}

// After a gap there is nothing to compare with.
func TestGap(t *testing.T) {
	l := Limits{Fastest: 1, StuckAfter: 60 * second, Spikes: true, Resolution: 0.1, Gap: 100 * second}
	if got, aside := judged(l, 100*second, 300, 380, 300, 300, 300, 300, 300, 390); !slices.Equal(got, make([]quality.Mark, 8)) || slices.Contains(aside, true) {
		t.Errorf("%v, aside %v", got, aside)
	}
	if got := first(judged(l, 99*second, 300, 300, 300)); !slices.Equal(got, marksOf(quality.Stuck, 3, 2)) {
		t.Errorf("%v", got)
	}
}

// The numbers are worked beside the definition (see [Hampel]) with a calculator: of the
// window centred on the odd one m is 70.2, the deviations are 0 0 0.1 0.1 0.2 0.2 14.8, and
// S is 0.1·1.4826 = 0.1483.
func TestHampel(t *testing.T) {
	x := []float64{70.1, 70.2, 70.0, 70.3, 85.0, 70.2, 70.1, 70.4, 70.2, 70.3}
	m, s, outlier := Hampel(x[1:8], x[4], 0)
	if math.Abs(m-70.2) > 1e-12 || math.Abs(s-0.1483) > 5e-5 || !outlier {
		t.Errorf("m = %g, S = %g, outlier %t; want 70.2, 0.1483, true", m, s, outlier)
	}
	for i := half; i+half < len(x); i++ {
		if _, _, outlier := Hampel(x[i-half:i+half+1], x[i], 0); outlier != (i == 4) {
			t.Errorf("reading %d: outlier %t", i, outlier)
		}
	}
	if math.Abs(perDeviation-1.4826) > 5e-5 {
		t.Errorf("%g standard deviations in a median deviation, want 1.4826", perDeviation)
	}
	// More than half of a window equal: one step beside is no outlier, four are.
	flat := []float64{70, 70, 70, 70, 70, 70}
	for steps, want := range map[int]bool{1: false, 3: false, 4: true} {
		v := 70 + 0.1*float64(steps)
		if _, s, outlier := Hampel(append(slices.Clone(flat), v), v, 0.1); outlier != want || s != 0.1 {
			t.Errorf("%d steps beside: outlier %t, S %g", steps, outlier, s)
		}
	}
}

// The trailing window sets one reading aside and nothing after it; a step is taken with its
// fourth reading.
func TestSpike(t *testing.T) {
	l := Limits{Spikes: true, Resolution: 0.1}
	marks, aside := judged(l, second, 70.2, 70.1, 70.1, 70.2, 70.0, 70.3, 85.0, 70.2, 70.1, 70.4, 70.2, 70.3)
	if want := marksOf(quality.Spike, 12, 6); !slices.Equal(marks, want) || !aside[6] || slices.Index(aside[7:], true) >= 0 {
		t.Errorf("%v, aside %v; want %v", marks, aside, want)
	}
	_, aside = judged(l, second, 70, 70.1, 70, 70.1, 70, 70.1, 70, 80, 80.1, 80, 80.1, 80, 80)
	if want := []bool{6: false, 7: true, 8: true, 9: true, 12: false}; !slices.Equal(aside, want) {
		t.Errorf("of a step %v are set aside, want %v", aside, want)
	}
	// Three steps beside are no outlier in K either, where they are 0.30000000000001 K.
	for n := range 100 {
		c := float64(n)
		flat := []float64{c, c, c, c, c, c, c + 0.3}
		for i := range flat {
			flat[i] += 273.15
		}
		if _, aside := judged(l, second, flat...); aside[6] {
			t.Errorf("three steps beside %g °C are set aside", c)
		}
	}
}

// Of normal noise one reading in twenty is set aside, since the median deviation of seven
// readings is often small, and of readings fifteen deviations off nearly all.
func TestSpikesInNoise(t *testing.T) {
	l := Limits{Spikes: true, Resolution: 0.01}
	r := rand.New(rand.NewPCG(1, 2))
	var s State
	noise, spikes, found := 0, 0, 0
	for i := range 20_000 {
		odd := i%50 == 49
		v := 300 + 0.1*r.NormFloat64()
		if odd {
			v += 1.5
			spikes++
		}
		_, aside := l.Judge(&s, begin+int64(i)*second, v)
		switch {
		case aside && odd:
			found++
		case aside:
			noise++
		}
	}
	if noise > 1500 || found < spikes*97/100 {
		t.Errorf("%d of 19600 readings of noise are set aside, %d of %d spikes", noise, found, spikes)
	}
}

// How often normal noise alone is found to be something, and single readings astray are
// found, of readings each second; as the reference of the keys tells it.
func TestRates(t *testing.T) {
	const n = 100_000
	spikes := func(resolution float64) Limits { return Limits{Spikes: true, Resolution: resolution} }
	for _, tt := range []struct {
		name                string
		limits              Limits
		noise, step, astray float64
		every               int
		want, about         float64
	}{
		{"noise of ten resolutions", spikes(0.1), 1, 0.1, 0, 1, 0.049, 0.004},
		{"noise of one", spikes(0.1), 0.1, 0.1, 0, 1, 0.0005, 0.0005},
		{"4 σ astray", spikes(0.1), 1, 0.1, 4, 50, 0.64, 0.04},
		{"6 σ astray", spikes(0.1), 1, 0.1, 6, 50, 0.89, 0.03},
		{"8 σ astray", spikes(0.1), 1, 0.1, 8, 50, 0.98, 0.015},
		{"10 σ astray", spikes(0.1), 1, 0.1, 10, 50, 0.995, 0.004},
		{"a fifth of what may change", Limits{Fastest: 1}, 0.2, 0, 0, 1, 0.0003, 0.0003},
		{"a half of what may change", Limits{Fastest: 1}, 0.5, 0, 0, 1, 0.12, 0.01},
		{"noise of a fifth of a step", Limits{StuckAfter: 1800 * second, Resolution: 0.1}, 0.02, 0.1, 0, 1, 0.9, 0.08},
		{"noise of half a step", Limits{StuckAfter: 1800 * second, Resolution: 0.1}, 0.05, 0.1, 0, 1, 0, 0},
	} {
		r := rand.New(rand.NewPCG(7, 8))
		var s State
		found, of := 0.0, 0.0
		for i := range n {
			v := 300.03 + tt.noise*r.NormFloat64()
			astray := i%tt.every == tt.every-1
			if astray {
				v += tt.astray
			}
			if tt.step > 0 {
				v = math.Round(v/tt.step) * tt.step
			}
			if m, _ := tt.limits.Judge(&s, begin+int64(i)*second, v); astray {
				if of++; m != quality.None {
					found++
				}
			}
		}
		if got := found / of; math.Abs(got-tt.want) > tt.about {
			t.Errorf("%s: %.4f of the readings, want %.4f ± %.4f", tt.name, got, tt.want, tt.about)
		}
	}
}

// Where several tests find something, the first in order is told, and a spike is set aside
// whatever it is called.
func TestOrderOfTests(t *testing.T) {
	l := Limits{Low: 273, High: 373, HasRange: true, Fastest: 0.1, Spikes: true, Resolution: 0.1}
	var s State
	for i := range int64(7) {
		l.Judge(&s, begin+i*second, 300)
	}
	for i, want := range []quality.Mark{quality.Implausible, quality.TooFast} {
		state := s
		state.Recent = slices.Clone(s.Recent)
		if m, aside := l.Judge(&state, begin+8*second, []float64{400, 350}[i]); m != want || !aside {
			t.Errorf("%v, aside %t; want %v", m, aside, want)
		}
	}
}

func TestNone(t *testing.T) {
	if l := (Limits{Resolution: 1, Gap: 1}); !l.None() {
		t.Error("limits without a test test something")
	}
	for _, l := range []Limits{{HasRange: true}, {Fastest: 1}, {StuckAfter: 1}, {Spikes: true}} {
		if l.None() {
			t.Errorf("%+v tests nothing", l)
		}
	}
}

func BenchmarkJudge(b *testing.B) {
	l := Limits{Low: 273, High: 373, HasRange: true, Fastest: 1, StuckAfter: 1800 * second, Spikes: true, Resolution: 0.1}
	var s State
	at := begin
	for b.Loop() {
		at += second
		l.Judge(&s, at, 300+float64(at/second%7)/10)
	}
}
