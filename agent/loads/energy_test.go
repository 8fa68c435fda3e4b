package loads

import (
	"math"
	"math/rand/v2"
	"testing"
)

// hourly is an hour of the plant by mass flow whose true quantities are known.
type hourly struct {
	cfg   Config
	truth [3]func(s float64) float64 // flow, inlet, outlet at s seconds
	next  [3]func(rng *rand.Rand) float64
	noise [3]func(rng *rand.Rand) float64
	// sends says which readings a source sends; nil for all.
	sends func(tag int, last, now float64) bool
	// prepare draws what is another in every run; nil where nothing is.
	prepare func(rng *rand.Rand)
}

const simulated = 3600 // s

// steadily returns the hour of a steady load of 200 kW with 10 s between readings.
func steadily() hourly {
	h := hourly{cfg: plant(liquid)}
	h.cfg.Grid = 10 * second
	for k, v := range [3]float64{2.5, 343, 323} {
		h.truth[k] = func(float64) float64 { return v }
		h.next[k] = every(10)
		h.noise[k] = white(0)
	}
	return h
}

func every(s float64) func(*rand.Rand) float64 { return func(*rand.Rand) float64 { return s } }

func white(sigma float64) func(*rand.Rand) float64 {
	return func(rng *rand.Rand) float64 { return sigma * rng.NormFloat64() }
}

// run simulates the hour, every reading off by offset and by its noise. It returns how far
// the registered heat is from the true one, and the variance that the minutes predict.
func (h *hourly) run(t *testing.T, rng *rand.Rand, offset [3]float64) (off, predicted float64) {
	t.Helper()
	if h.prepare != nil {
		h.prepare(rng)
	}
	e := engine(t, h.cfg)
	var first, last [3]float64 // stamps of the readings to come, and values of those sent
	sent := [3]bool{}
	var minutes []Minute
	var sum Sum
	grid := int(h.cfg.Grid / second)
	for s := 0; s < simulated; s += grid {
		var b Beat
		for k := range first {
			for first[k] <= float64(s) {
				v := h.truth[k](first[k]) + offset[k] + h.noise[k](rng)
				if h.sends == nil || !sent[k] || h.sends(k, last[k], v) {
					b.Readings = append(b.Readings, Reading{Tag: k, At: through(first[k]), Value: v})
					last[k], sent[k] = v, true
				}
				first[k] += h.next[k](rng)
			}
		}
		b.Through = through(float64(s + grid))
		minutes = e.Advance(b, minutes)
	}
	// The truth goes straight from second to second, so the middle tells its integral.
	for m := 0.5; m < simulated; m++ {
		sum.Add(4000 * h.truth[flow](m) * (h.truth[inlet](m) - h.truth[outlet](m)))
	}
	l := e.Snapshot().Loads[0]
	if l.Measured != simulated*second || len(minutes) != 60 {
		t.Fatalf("measured %d s in %d minutes", l.Measured/second, len(minutes))
	}
	return l.Given - l.Taken - sum.Value(), period(minutes)
}

// period is the variance of the heat of some minutes: what lasts adds up as it stands, what
// does not as variances do.
func period(minutes []Minute) float64 {
	var systematic [Parts]float64
	var random float64
	for _, m := range minutes {
		for p, v := range m.Systematic {
			systematic[p] += v
		}
		random += m.Random
	}
	return sumOfSquares(systematic[:]) + random
}

// spreadOf runs the hour many times and returns the root mean square of what it is off by,
// and of what was predicted.
func (h *hourly) spreadOf(t *testing.T, seed uint64, offset func(rng *rand.Rand) [3]float64) (off, predicted float64) {
	t.Helper()
	rng := rand.New(rand.NewPCG(seed, 3600))
	for range runs {
		d, v := h.run(t, rng, offset(rng))
		off += d * d
		predicted += v
	}
	return math.Sqrt(off / float64(runs)), math.Sqrt(predicted / float64(runs))
}

func none(*rand.Rand) [3]float64 { return [3]float64{} }

// Over a period random parts add as root of the sum of squares and systematic parts as
// they stand (methods of JCGM 100:2008, 5.2): 200 simulated hours with calibration errors
// drawn once each and noise drawn for each reading. Rectangular errors scatter less than normal ones, so [agree]
// holds for them too.
func TestEnergyOfAnHour(t *testing.T) {
	accurate := [3]Accuracy{{Rel: 0.01}, {Abs: 0.3}, {Abs: 0.3}}
	for _, tt := range []struct {
		name             string
		noise, accuracy  bool
		pair, percentage float64 // expected prediction in per cent of the heat
	}{
		// One reading: √((0.05/2.5)² + 2·(0.2/20)²) = 2.449 %, over √360.
		{"random", true, false, 0, 2.449 / math.Sqrt(360)},
		// √(0.577² + 2·(0.3/√3/20)²) %.
		{"systematic", false, true, 0, math.Hypot(1/math.Sqrt(3), 1.5*math.Sqrt(2./3))},
		{"systematic of a pair", false, true, 0.9, math.Hypot(1/math.Sqrt(3), 1.5*math.Sqrt(0.2/3))},
		{"both", true, true, 0.9, math.Hypot(2.449/math.Sqrt(360), math.Hypot(1/math.Sqrt(3), 1.5*math.Sqrt(0.2/3)))},
	} {
		t.Run(tt.name, func(t *testing.T) {
			h := steadily()
			h.cfg.Loads[0].Stream.Pair = tt.pair
			if tt.noise {
				h.noise = [3]func(*rand.Rand) float64{white(0.05), white(0.2), white(0.2)}
			}
			offset := none
			if tt.accuracy {
				for k := range accurate {
					h.cfg.Tags[k].Accuracy = accurate[k]
				}
				offset = calibration(tt.pair, [3]float64{0.025, 0.3, 0.3})
			}
			off, predicted := h.spreadOf(t, 1, offset)
			heat := 4000 * 2.5 * 20. * simulated
			t.Logf("off by %.4f %%, predicted %.4f %%", 100*off/heat, 100*predicted/heat)
			near(t, "prediction in per cent", 100*predicted/heat, tt.percentage, 0.02*tt.percentage)
			agree(t, off, predicted, 1, 1)
		})
	}
}

// runs of a simulation: where the prediction is right the sum of squares over the predicted
// variance is χ² with 200 degrees of freedom, which lies in 141 to 272 but once in a
// thousand times (Wilson and Hilferty's approximation, from memory).
const runs = 200

// agree wants the prediction to be from least to most times what the runs are off by, by the
// bounds of χ².
func agree(t *testing.T, off, predicted, least, most float64) {
	t.Helper()
	lo, hi := least*math.Sqrt(runs/272.), most*math.Sqrt(runs/141.)
	if ratio := predicted / off; !(ratio >= lo && ratio <= hi) {
		t.Errorf("predicted %.4g J, off by %.4g J (rms): ratio %.3f, want %.3f to %.3f", predicted, off, ratio, lo, hi)
	}
}

// calibration draws the error of each tag within its limits; those of the thermometers
// have a part in common, so that they correlate by r.
func calibration(r float64, limit [3]float64) func(*rand.Rand) [3]float64 {
	return func(rng *rand.Rand) (d [3]float64) {
		common := math.Sqrt(r) * rectangular(rng)
		for k := range d {
			own := math.Sqrt(1-r)*rectangular(rng) + common
			if k == flow {
				own = rectangular(rng)
			}
			d[k] = own * limit[k] / math.Sqrt(3)
		}
		return d
	}
}

// Random parts where tags report at rates of their own, faster and slower than the grid,
// and irregularly.
func TestEnergyAtOtherRates(t *testing.T) {
	for _, tt := range []struct {
		name string
		grid int64
		next [3]func(*rand.Rand) float64
	}{
		{"each at its own", 4 * second, [3]func(*rand.Rand) float64{every(1.7), every(17), every(6)}},
		{"irregular", 5 * second, [3]func(*rand.Rand) float64{every(2.5), uneven(2, 40), uneven(0.2, 15)}},
		{"coarse grid", 10 * second, [3]func(*rand.Rand) float64{every(3), every(3.3), every(20)}},
	} {
		t.Run(tt.name, func(t *testing.T) {
			h := steadily()
			h.cfg.Grid, h.next = tt.grid, tt.next
			h.noise = [3]func(*rand.Rand) float64{white(0.05), white(0.2), white(0.2)}
			off, predicted := h.spreadOf(t, 2, none)
			t.Logf("off by %.4g J, predicted %.4g J: ratio %.3f", off, predicted, predicted/off)
			agree(t, off, predicted, 1, 1)
		})
	}
}

func uneven(least, most float64) func(*rand.Rand) float64 {
	return func(rng *rand.Rand) float64 { return least + (most-least)*rng.Float64() }
}

// A quantity that moves between readings without noise is missed while a reading is held.
// Of a random walk two thirds of the predicted variance are true. One that forgets within T
// comes back on what was missed: of the predicted σ²·(1−a)·τ, a = e^(−τ/T), there is
//
//	σ²·(τ·(1+a)/(1−a) − 2·T)
//
// as the long-run variances of the sum of readings and of the integral have it, so that the
// prediction is from once, with hardly any memory, to √6 = 2.4 times what is true. The course
// is drawn in steps of 1 s, which is worth up to a tenth.
func TestEnergyOfAQuantityThatMoves(t *testing.T) {
	const step = 10 // s
	for _, memory := range []float64{math.Inf(1), 60, 5, 0.5} {
		a := math.Exp(-step / memory)
		want := math.Sqrt(step * (1 - a) / (step*(1+a)/(1-a) - 2*memory))
		if math.IsInf(memory, 1) {
			want = math.Sqrt(1.5)
		}
		h := steadily()
		h.prepare = func(rng *rand.Rand) { h.truth[inlet] = wandering(rng, 343, 0.05, memory, simulated) }
		off, predicted := h.spreadOf(t, 3, none)
		t.Logf("memory of %g s: predicted %.3f times what it is off by, by theory %.3f", memory, predicted/off, want)
		agree(t, off, predicted, 0.9*want, 1.1*want)
	}
}

// wandering is a first-order process that a step of standard deviation sigma enters each
// second and that forgets within memory seconds; it stands still from rest on.
func wandering(rng *rand.Rand, mean, sigma, memory float64, rest int) func(s float64) float64 {
	course := make([]float64, simulated+2)
	keep, v := math.Exp(-1/memory), 0.0
	for s := range course {
		if s < rest {
			v = keep*v + sigma*rng.NormFloat64()
		}
		course[s] = mean + v
	}
	return func(s float64) float64 {
		k := int(s)
		return course[k] + (course[k+1]-course[k])*(s-float64(k))
	}
}

// Noise with a memory cannot be told from a quantity that moves. Where each error keeps a
// half of the one before, the prediction is √((1−½)²/(1+½)) = 0.41 of what is true: the
// limit of what successive differences can tell.
func TestEnergyWithNoiseThatHasAMemory(t *testing.T) {
	h := steadily()
	v := 0.0
	h.noise[inlet] = func(rng *rand.Rand) float64 {
		v = 0.5*v + 0.2*rng.NormFloat64()
		return v
	}
	off, predicted := h.spreadOf(t, 4, none)
	want := math.Sqrt(0.25 / 1.5)
	agree(t, off, predicted, want, want)
}

// A quantity that climbs through the hour is followed half a step behind: 10 K · 5 s.
func TestEnergyOfAClimbLagsHalfAStep(t *testing.T) {
	h := steadily()
	h.truth[inlet] = func(s float64) float64 { return 343 + 10*s/simulated }
	off, _ := h.run(t, rand.New(rand.NewPCG(5, 5)), [3]float64{})
	near(t, "heat", off, -4000*2.5*10*5, 1)
}

// What a dead band leaves lasts: a quantity that climbs through the hour is followed half
// a dead band behind, which is 0.87 of what is predicted. As something that the next report
// makes good, with 30 reports, the climb's error would be 4.7 times the prediction. A walk
// that comes to rest stays somewhere within it, nearer to the last report than to its
// edges (a variance of D²/6, so the prediction is √2 of it). One that never rests is off by
// far less; that is the price of not knowing which it will be.
func TestEnergyBehindADeadband(t *testing.T) {
	const deadband = 0.5
	h := steadily()
	h.cfg.Tags[inlet].Deadband, h.cfg.Tags[inlet].MaxAge = deadband, 120*minute
	h.cfg.Grid, h.next[inlet] = 5*second, every(5)
	h.sends = func(tag int, last, now float64) bool { return tag != inlet || math.Abs(now-last) > deadband }

	h.truth[inlet] = func(s float64) float64 { return 343 + 15*s/simulated }
	off, predicted := h.run(t, rand.New(rand.NewPCG(6, 6)), [3]float64{})
	near(t, "climb, by what is predicted", -off/math.Sqrt(predicted), math.Sqrt(3)/2, 0.04) // and up to a scan of 0.02 K more

	for _, tt := range []struct {
		name        string
		rest        int
		least, most float64
	}{{"at rest after five minutes", 300, 1.35, 1.5}, {"never at rest", simulated, 10, 20}} {
		t.Run(tt.name, func(t *testing.T) {
			h.prepare = func(rng *rand.Rand) { h.truth[inlet] = wandering(rng, 343, 0.05, math.Inf(1), tt.rest) }
			off, predicted := h.spreadOf(t, 7, none)
			t.Logf("off by %.4g J, predicted %.4g J: ratio %.3f", off, predicted, predicted/off)
			agree(t, off, predicted, tt.least, tt.most)
		})
	}
}
