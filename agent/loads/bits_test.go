package loads

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/screen"
)

// course draws ten minutes of readings of the three tags, stamped irregularly,
// with gaps, and in order of their stamps.
func course(t *rapid.T) []Reading {
	var all []Reading
	for tag := range 3 {
		s := rapid.Int64Range(0, 5e9).Draw(t, "first")
		calm := rapid.Bool().Draw(t, "calm")
		for s < 600e9 {
			v := rapid.Float64Range(1, 3).Draw(t, "value")
			if calm && rapid.IntRange(0, 15).Draw(t, "odd") != 9 {
				v = 2 + v/1000
			}
			if tag != flow {
				v = 300 + 30*v
			}
			r := Reading{Tag: tag, At: epoch + s, Value: v}
			switch rapid.IntRange(0, 40).Draw(t, "mark") {
			case 1:
				r.Value, r.Mark = 1e300, quality.Failed
			case 2, 3, 4:
				r.Mark = quality.OffSpec
			}
			all = append(all, r)
			s += rapid.Int64Range(1, 9e9).Draw(t, "step")
			if rapid.IntRange(0, 60).Draw(t, "gap") == 0 {
				s += 90e9
			}
		}
	}
	slices.SortStableFunc(all, func(a, b Reading) int { return int(a.At - b.At) })
	return all
}

const lateness = 5 * second

// run feeds readings in the given order, cut into beats of the given sizes; each
// beat comes as far as its newest stamp less the lateness.
func run(e *Engine, readings []Reading, cut func() int) {
	var newest int64
	for len(readings) > 0 {
		n := min(cut(), len(readings))
		for _, r := range readings[:n] {
			newest = max(newest, r.At)
		}
		e.Advance(Beat{readings[:n], newest - lateness}, nil)
		readings = readings[n:]
	}
	e.Advance(Beat{nil, epoch + 700*second}, nil)
}

func fingerprint(e *Engine) []uint64 { return bitsOf(e.Snapshot()) }

func bitsOf(s Snapshot) (bits []uint64) {
	for _, l := range s.Loads {
		for _, v := range []float64{l.Given, l.Taken, l.Figure.Duty, l.Figure.Uncertainty, l.Figure.Rate, l.Figure.Random, l.Figure.Variance, l.Figure.Rate, l.BridgedGiven, l.BridgedTaken, l.Means[0].Duty, l.Means[2].Duty, l.Means[2].Coverage} {
			bits = append(bits, math.Float64bits(v))
		}
		bits = append(bits, uint64(l.Measured), uint64(l.Bridged), uint64(l.Missing), uint64(l.Uncertain), uint64(l.Figure.Mark))
	}
	return bits
}

// screenAll has the tags of the plant tested in every way, at limits that course comes to.
func screenAll(cfg *Config) {
	for i, rate := range []float64{flow: 1, inlet: 30, outlet: 30} {
		t := &cfg.Tags[i]
		t.Resolution = rate / 100
		t.Screen = &screen.Limits{Fastest: rate, StuckAfter: 20 * second, Spikes: true, Resolution: t.Resolution, Gap: t.MaxAge}
	}
	cfg.Tags[inlet].Screen.Low, cfg.Tags[inlet].Screen.High, cfg.Tags[inlet].Screen.HasRange = 330, 380, true
	cfg.Tags[flow].Screen.Fastest, cfg.Tags[inlet].Screen.Fastest = 0, 3
	cfg.Tags[outlet].Screen.Fastest, cfg.Tags[outlet].Screen.Resolution = 0, 3
	cfg.Tags[inlet].Accuracy.Abs, cfg.Tags[inlet].Beside, cfg.Tags[inlet].HasBeside = 2, outlet, true
}

// Order within the lateness, the cut into beats and a restart change no bit.
func TestSameReadingsSameBits(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		cfg := plant(liquid)
		if rapid.Bool().Draw(t, "screened") {
			screenAll(&cfg)
		}
		readings := course(t)
		plain, _ := New(cfg)
		run(plain, readings, func() int { return 1 })
		want := fingerprint(plain)

		shuffled := slices.Clone(readings)
		jitter := make(map[Reading]int64)
		for _, r := range shuffled {
			jitter[r] = r.At + rapid.Int64Range(0, lateness-1).Draw(t, "delay")
		}
		slices.SortStableFunc(shuffled, func(a, b Reading) int { return int(jitter[a] - jitter[b]) })
		cut := func() int { return rapid.IntRange(1, 50).Draw(t, "beat") }

		e, _ := New(cfg)
		stop := rapid.IntRange(0, len(shuffled)).Draw(t, "stop")
		var newest int64
		for _, r := range shuffled[:stop] {
			newest = max(newest, r.At)
		}
		e.Advance(Beat{shuffled[:stop], newest - lateness}, nil)
		state, err := e.Save()
		if err != nil {
			t.Fatal(err)
		}
		again, _ := New(cfg)
		if err := again.Restore(state); err != nil {
			t.Fatal(err)
		}
		again.Recall(shuffled[:stop])
		back := max(0, stop-20) // what the broker delivers a second time
		run(again, shuffled[back:], cut)
		if got := fingerprint(again); !slices.Equal(got, want) {
			t.Fatalf("after a shuffle, a restart at %d and other beats: %x, want %x", stop, got, want)
		}
	})
}
