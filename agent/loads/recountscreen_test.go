package loads

import (
	"math"
	"math/rand/v2"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/screen"
)

// screenedPlant draws a plant as anyPlant does, whose rates are tested in every way: each
// signal by itself, inlet and outlet beside each other, and flows by a pump.
func screenedPlant(r *rand.Rand) Config {
	cfg := anyPlant(r)
	for _, tag := range []int{mixFlow, mixInlet, mixOutlet, mixTold, anyTemperature} {
		t := &cfg.Tags[tag]
		size := []float64{1, 30}[r.IntN(2)]
		if tag == mixFlow || tag == mixTold {
			size /= 20
		}
		l := screen.Limits{Resolution: size * float64(r.IntN(2)), Gap: []int64{0, t.MaxAge}[r.IntN(2)], Spikes: r.IntN(2) == 0}
		l.Low, l.High, l.HasRange = t.Accuracy.Zero+1.2, 345, r.IntN(2) == 0
		l.Fastest, l.StuckAfter = size*float64(r.IntN(3)), 20*second*int64(r.IntN(2))
		t.Resolution, t.Screen = l.Resolution, &l
		t.Accuracy.Abs *= []float64{1, 100}[r.IntN(2)]
	}
	beside := [2]int{mixInlet, []int{mixOutlet, anyTemperature}[r.IntN(2)]}
	if r.IntN(2) == 0 {
		beside[0], beside[1] = beside[1], beside[0]
	}
	cfg.Tags[beside[0]].Beside, cfg.Tags[beside[0]].HasBeside = beside[1], r.IntN(3) > 0
	for i := range cfg.Loads {
		l := &cfg.Loads[i]
		l.HasRunning = l.counter(cfg.Tags) < 0 && r.IntN(2) == 0
		l.Running = FromTag(mixAlive)
	}
	return cfg
}

// screen puts what the tests leave of the readings in their place: of those of one grid step
// the last, with what is found of it. What is set aside has the value before it.
func (o *recount) screen() {
	o.aside = make(map[Reading]bool)
	for tag, all := range o.readings {
		l := o.cfg.Tags[tag].Screen
		if l == nil {
			continue
		}
		var left, told []Reading
		for i, x := range all {
			if i+1 == len(all) || ceil(x.At, o.cfg.Grid) != ceil(all[i+1].At, o.cfg.Grid) {
				left = append(left, x)
			}
		}
		found, odd := finds(l, left)
		for i, x := range left {
			x.Mark = quality.Worse(x.Mark, found[i])
			if n := len(told); odd[i] && n > 0 && !isBad(told[n-1]) {
				x.Value, x.Mark = told[n-1].Value, quality.Worse(told[n-1].Mark, found[i])
				o.aside[x] = true
			}
			told = append(told, x)
		}
		o.readings[tag] = told
	}
}

// finds are the marks of the tests on readings, and which of these are outliers.
func finds(l *screen.Limits, all []Reading) (found []quality.Mark, odd []bool) {
	found, odd = make([]quality.Mark, len(all)), make([]bool, len(all))
	var of []int // what is tested and hangs together
	test := func() {
		fast := make([]bool, len(of))
		for i, k := range of {
			x := all[k]
			fast[i] = l.Fastest > 0 && fastAt(l, all, of, fast, i)
			odd[k] = l.Spikes && i >= 6 && outlies(all, of[i-6:i+1], l.Resolution)
			switch {
			case l.HasRange && (x.Value < l.Low || x.Value > l.High):
				found[k] = quality.Implausible
			case fast[i]:
				found[k] = quality.TooFast
			case l.StuckAfter > 0 && standsStill(l, all, of[:i+1]):
				found[k] = quality.Stuck
			case odd[k]:
				found[k] = quality.Spike
			}
		}
		of = of[:0]
	}
	for k, x := range all {
		if isBad(x) {
			continue
		}
		if n := len(of); n > 0 && l.Gap > 0 && x.At-all[of[n-1]].At >= l.Gap {
			test()
		}
		of = append(of, k)
	}
	test()
	return found, odd
}

// fastAt tells of the reading i of those in of whether it cannot follow from the last that
// did not come too fast, unless it is the third of three that did.
func fastAt(l *screen.Limits, all []Reading, of []int, fast []bool, i int) bool {
	can := func(from, to int) bool {
		a, b := all[of[from]], all[of[to]]
		return math.Abs(b.Value-a.Value) <= l.Fastest*float64(b.At-a.At)/1e9+l.Resolution*(1+1e-6)
	}
	base := i - 1
	for base >= 0 && fast[base] {
		base--
	}
	third := i >= 2 && fast[i-1] && fast[i-2] && can(i-2, i-1) && can(i-1, i)
	return base >= 0 && !can(base, i) && !third
}

// outlies tells whether the last of a window is an outlier: the median is that of which half
// the others are at or below.
func outlies(all []Reading, window []int, step float64) bool {
	median := func(v func(k int) float64) float64 {
		for _, k := range window {
			below, above := 0, 0
			for _, j := range window {
				if v(j) < v(k) {
					below++
				}
				if v(j) > v(k) {
					above++
				}
			}
			if below <= 3 && above <= 3 {
				return v(k)
			}
		}
		return math.NaN()
	}
	m := median(func(k int) float64 { return all[k].Value })
	s := median(func(k int) float64 { return math.Abs(all[k].Value - m) })
	return math.Abs(all[window[6]].Value-m) > 3*max(s/(math.Sqrt2*math.Erfinv(0.5)), step*(1+1e-6))
}

// standsStill tells whether the readings have stayed within a step since a time that is long
// enough: each that left the step began anew.
func standsStill(l *screen.Limits, all []Reading, of []int) bool {
	step, begin := l.Resolution*(1+1e-6), 0
	low, high := math.Inf(1), math.Inf(-1)
	for i, k := range of {
		v := all[k].Value
		if low, high = min(low, v), max(high, v); high-low > step {
			low, high, begin = v, v, i
		}
	}
	n := len(of)
	return n-begin >= 3 && all[of[n-1]].At-all[of[begin]].At >= l.StuckAfter && (low > step || high < -step)
}

// disagrees tells whether a sensor beside the tag of src tells something else, at each grid
// point.
func (o *recount) disagrees(src Source) []bool {
	all := make([]bool, (o.to-o.from)/o.cfg.Grid)
	if src.Tag < 0 || o.cfg.Tags[src.Tag].Counter != nil {
		return all
	}
	own := o.column(src)
	for k := range o.cfg.Tags {
		stands := o.cfg.Tags[k].HasBeside && o.cfg.Tags[k].Beside == src.Tag
		if own := &o.cfg.Tags[src.Tag]; own.HasBeside && own.Beside == k {
			stands = true
		}
		if !stands {
			continue
		}
		for i, x := range o.column(FromTag(k)) {
			u := o.squared(src, own[i]) + o.squared(FromTag(k), x)
			apart := x.Value - own[i].Value
			all[i] = all[i] || x.usable && own[i].usable && u > 0 && apart*apart > 4*u
		}
	}
	return all
}

// squared is the variance of a reading by all that may be wrong with it.
func (o *recount) squared(src Source, x known) float64 {
	u, alone := o.lasting(src, x.Value)
	return u*u + alone + x.noise
}
