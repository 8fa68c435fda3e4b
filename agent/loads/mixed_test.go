package loads

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// The tags of the mixed plant.
const (
	mixFlow = iota
	mixInlet
	mixOutlet
	mixCount  // kg
	mixEnergy // J
	mixTold   // a flow that is reported on change
	mixAlive
	mixTags
)

// mixedPlant is one with everything that the accounts have to decide on: a rate and a
// counter, each with bridges and a witness, a source that reports by exception, and a
// vessel.
func mixedPlant(grid int64) Config {
	stream := plant(liquid).Loads[0].Stream
	stream.IdleBelow = 0.1
	counted, told := stream, stream
	counted.Flow, told.Flow, told.Gives = FromTag(mixCount), FromTag(mixTold), false
	v := tank()
	v.Temperature, v.Over = FromTag(mixInlet), minute
	return Config{
		Grid: grid, Bridge: 40 * second,
		Tags: []Tag{
			mixFlow:   {Name: "FT", MaxAge: 12 * second, Accuracy: Accuracy{Rel: 0.01}},
			mixInlet:  {Name: "TI", MaxAge: 12 * second, Accuracy: Accuracy{Abs: 0.1}},
			mixOutlet: {Name: "TO", MaxAge: 25 * second, Accuracy: Accuracy{Abs: 0.1}},
			mixCount:  {Name: "QT", MaxAge: 90 * second, Resolution: 0.5, Counter: &Counter{Modulus: 1000, Largest: 5}},
			mixEnergy: {Name: "ET", MaxAge: minute, Counter: &Counter{Modulus: 1e8}},
			mixTold:   {Name: "FC", MaxAge: minute, OnChange: true, Alive: mixAlive},
			mixAlive:  {Name: "LIFE", MaxAge: 30 * second},
		},
		Loads: []Load{
			{Name: "rate", Stream: stream, Witness: FromTag(mixEnergy), HasWitness: true},
			{Name: "counted", Stream: counted, Witness: FromTag(mixEnergy), HasWitness: true},
			{Name: "on change", Stream: told},
			{Name: "vessel", Vessel: &v},
		},
	}
}

// value draws what the tag reads after last: also no flow, a reverse one, water near
// boiling, roll-overs, and registers that stand still, fall, or jump beyond belief; less
// often in a calm course.
func value(t *rapid.T, tag int, last float64, calm int) float64 {
	odd := rapid.IntRange(0, 24*calm).Draw(t, "odd")
	x := rapid.Float64Range(0, 1).Draw(t, "value")
	switch tag {
	case mixFlow, mixTold:
		if odd < 3 {
			return []float64{-1, 0, 0.05}[odd]
		}
		return 1 + 2*x
	case mixInlet, mixOutlet:
		if odd == 0 {
			return 418 // near boiling
		}
		return 300 + 60*x
	case mixAlive:
		return float64(min(odd, 1))
	case mixCount:
		return register(last, 20*x, odd, 1000)
	}
	return register(last, 2e6*x, odd, 1e8)
}

// register is what a counter reads that rises, rolls over, or does worse.
func register(last, rise float64, odd int, modulus float64) float64 {
	switch {
	case odd == 0:
		return last / 2
	case odd == 1:
		return math.Mod(last+modulus*0.4, modulus)
	case odd < 6:
		return last
	}
	return math.Mod(last+rise, modulus)
}

// mixedCourse draws ten minutes of readings of the mixed plant, in order of their stamps.
// There is a time in it in which nothing but the counter is heard.
func mixedCourse(t *rapid.T) []Reading {
	var all []Reading
	calm := rapid.SampledFrom([]int{1, 20}).Draw(t, "calm")
	silent := rapid.Int64Range(0, 600e9).Draw(t, "silent")
	heard := silent + rapid.Int64Range(0, 120e9).Draw(t, "heard")
	for tag := range mixTags {
		most := [mixTags]int64{9, 9, 9, 60, 70, 50, 20}[tag] * second
		last := [mixTags]float64{mixCount: 900, mixEnergy: 9e7}[tag]
		s := rapid.Int64Range(0, 5e9).Draw(t, "first")
		for s < 600e9 {
			if last = value(t, tag, last, calm); tag == mixCount || s < silent || s >= heard {
				all = append(all, Reading{Tag: tag, At: epoch + s, Value: last})
			}
			s += rapid.Int64Range(1, most).Draw(t, "step")
			if rapid.IntRange(0, 30*calm).Draw(t, "gap") == 0 {
				s += rapid.Int64Range(10e9, 70e9).Draw(t, "long")
			}
		}
	}
	slices.SortStableFunc(all, func(a, b Reading) int { return int(a.At - b.At) })
	return all
}

// ledger is what the accounts of the mixed plant told.
type ledger struct {
	minutes [4][]Minute
	loads   []LoadState
}

// keep feeds readings in the given order, cut into beats, and asserts after each that the
// times add up and that no register fell. Each beat comes as far as its newest stamp less
// the lateness.
func (k *ledger) keep(t *rapid.T, e *Engine, readings []Reading, newest int64, cut func() int) int64 {
	for len(readings) > 0 {
		n := min(cut(), len(readings))
		for _, r := range readings[:n] {
			newest = max(newest, r.At)
		}
		k.take(t, e, Beat{readings[:n], newest - lateness})
		readings = readings[n:]
	}
	return newest
}

func (k *ledger) take(t *rapid.T, e *Engine, b Beat) {
	for _, m := range e.Advance(b, nil) {
		k.minutes[m.Load] = append(k.minutes[m.Load], m)
	}
	s := e.Snapshot()
	for i, l := range s.Loads {
		if l.Measured+l.Bridged+l.Missing+l.Undecided != s.Loads[0].Measured+s.Loads[0].Bridged+s.Loads[0].Missing+s.Loads[0].Undecided {
			t.Fatalf("times of load %d: %+v, undecided %d; those of load 0 add up otherwise: %+v, undecided %d", i, l.Totals, l.Undecided, s.Loads[0].Totals, s.Loads[0].Undecided)
		}
		if k.loads != nil {
			was := k.loads[i]
			if l.Given < was.Given || l.Taken < was.Taken || l.BridgedGiven < was.BridgedGiven || l.BridgedTaken < was.BridgedTaken ||
				l.Measured < was.Measured || l.Bridged < was.Bridged || l.Missing < was.Missing {
				t.Fatalf("a register of load %d fell: %+v after %+v", i, l.Totals, was.Totals)
			}
		}
	}
	k.loads = s.Loads
}

// check asserts that two ledgers are the same to the last bit.
func (k *ledger) check(t *rapid.T, want *ledger) {
	for i := range want.loads {
		if k.loads[i] != want.loads[i] {
			t.Fatalf("load %d: %+v, want %+v", i, k.loads[i], want.loads[i])
		}
		if !slices.Equal(k.minutes[i], want.minutes[i]) {
			t.Fatalf("minutes of load %d: %+v, want %+v", i, k.minutes[i], want.minutes[i])
		}
	}
}

// sums asserts that the minutes that closed, and the time that has not, make the
// registers.
func (k *ledger) sums(t *rapid.T) {
	for i, minutes := range k.minutes[:len(k.loads)] {
		var s Minute
		for _, m := range minutes {
			if m.Measured+m.Bridged+m.Missing > minute || m.Idle > m.Measured || m.Bridged+m.Measured == 0 {
				t.Fatalf("load %d: minute %+v", i, m)
			}
			s.Measured += m.Measured
			s.Bridged += m.Bridged
			s.Given += m.Given
			s.Taken += m.Taken
			s.BridgedGiven += m.BridgedGiven
			s.BridgedTaken += m.BridgedTaken
		}
		l := &k.loads[i]
		close := func(a, b float64) bool { return math.Abs(a-b) <= 1e-12*b }
		if s.Measured != l.Measured || s.Bridged != l.Bridged || !close(s.Given, l.Given) || !close(s.Taken, l.Taken) ||
			!close(s.BridgedGiven, l.BridgedGiven) || !close(s.BridgedTaken, l.BridgedTaken) {
			t.Fatalf("load %d: minutes add up to %+v, registers %+v", i, s, l.Totals)
		}
	}
}

// restart saves the engine and goes on from what was saved; what the broker delivered
// lately is known.
func restart(t *rapid.T, cfg Config, e *Engine, delivered []Reading) *Engine {
	state, err := e.Save()
	if err != nil {
		t.Fatal(err)
	}
	again, err := New(cfg)
	if err != nil {
		t.Fatal(err)
	}
	if err := again.Restore(state); err != nil {
		t.Fatal(err)
	}
	again.Recall(delivered)
	return again
}

// Order within the lateness, the cut into beats, restarts at any point and what the broker
// delivers a second time change no bit of a register, a mean, a figure or a minute.
func TestMixedPlantSameReadingsSameBits(t *testing.T) {
	var seen Minute
	var resets, nonsense uint64
	end := Beat{nil, epoch + 1200*second}
	rapid.Check(t, func(t *rapid.T) {
		cfg := mixedPlant(rapid.SampledFrom([]int64{second, 5 * second}).Draw(t, "grid"))
		readings := mixedCourse(t)
		plain, err := New(cfg)
		if err != nil {
			t.Fatal(err)
		}
		var want ledger
		want.keep(t, plain, readings, 0, func() int { return 1 })
		want.take(t, plain, end)
		want.sums(t)

		delay := make(map[Reading]int64)
		for _, r := range readings {
			delay[r] = r.At + rapid.Int64Range(0, lateness-1).Draw(t, "delay")
		}
		slices.SortStableFunc(readings, func(a, b Reading) int { return int(delay[a] - delay[b]) })
		cut := func() int { return rapid.IntRange(1, 80).Draw(t, "beat") }
		e, _ := New(cfg)
		var got ledger
		var newest int64
		from := 0
		for range 3 {
			to := rapid.IntRange(from, len(readings)).Draw(t, "restart")
			again := max(0, from-20)
			newest = got.keep(t, e, readings[again:to], newest, cut)
			e = restart(t, cfg, e, readings[:to])
			from = to
		}
		got.keep(t, e, readings[max(0, from-20):], newest, cut)
		got.take(t, e, end)
		got.check(t, &want)
		for _, l := range want.minutes {
			for _, m := range l {
				seen.Idle += m.Idle
				seen.Missing += m.Missing
				seen.BridgedGiven += m.BridgedGiven
				seen.BridgedTaken += m.BridgedTaken
				seen.Compared += math.Abs(m.Compared)
				seen.Random += m.Random
			}
		}
		y := plain.Snapshot().Tags[mixCount].Tally
		resets, nonsense = resets+y.Reset, nonsense+y.Implausible
	})
	if seen.Idle == 0 || seen.Missing == 0 || seen.BridgedGiven == 0 || seen.BridgedTaken == 0 || seen.Compared == 0 || seen.Random == 0 || resets == 0 || nonsense == 0 {
		t.Errorf("the courses drawn do not show everything: %+v, %d resets, %d implausible counts", seen, resets, nonsense)
	}
}
