package loads

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"heatreeve/ingest/quality"
)

// The tags of a plant that is recounted: those of the mixed plant, and a counter, a heat
// meter and a thermometer that report on change.
const (
	anyCount = mixTags + iota
	anyEnergy
	anyTemperature
	anyTags
)

// anyPlant draws a plant of one to four streams.
func anyPlant(r *rand.Rand) Config {
	grid := []int64{100e6, second, second, 5 * second, 20 * second, minute}[r.IntN(6)]
	cfg := Config{Grid: grid, Bridge: []int64{0, 20 * second, 40 * second, 3 * minute, 120 * minute}[r.IntN(5)]}
	cfg.Tags = mixedPlant(grid).Tags
	cfg.Tags[mixInlet].Resolution, cfg.Tags[mixCount].Accuracy.Rel, cfg.Tags[mixOutlet].Accuracy.Zero = 0.01, 0.02, 273.15
	cfg.Tags = append(cfg.Tags,
		Tag{Name: "QC", OnChange: true, Alive: mixAlive, Counter: &Counter{}},
		Tag{Name: "EC", OnChange: true, Alive: mixAlive, Counter: &Counter{}},
		Tag{Name: "TC", OnChange: true, Alive: mixAlive, Deadband: 0.2},
	)
	for i := range cfg.Tags {
		cfg.Tags[i].MaxAge = []int64{grid / 2, 12 * second, 30 * second, minute, 3 * minute}[r.IntN(5)]
	}
	from := func(tags ...int) Source { return FromTag(tags[r.IntN(len(tags))]) }
	for i := range 1 + r.IntN(4) {
		l := Load{Name: fmt.Sprint(i), Stream: plant(liquid).Loads[0].Stream, HasWitness: r.IntN(4) > 0}
		s := &l.Stream
		s.IdleBelow, s.Gives, s.Pair = 0.1, r.IntN(2) == 0, 0.45*float64(r.IntN(3))
		s.BothWays = r.IntN(2) == 0
		s.Flow = from(mixFlow, mixTold, mixCount, mixCount, anyCount, anyCount)
		s.Inlet, s.Outlet = from(mixInlet, mixOutlet, anyTemperature), from(mixInlet, mixOutlet, anyTemperature)
		l.Witness = from(mixEnergy, anyEnergy, anyEnergy)
		cfg.Loads = append(cfg.Loads, l)
	}
	return cfg
}

// anyCourse draws readings over a length of time, in which most tags fall silent for a
// while; in every other course all but a heat meter and a sign of life.
func anyCourse(r *rand.Rand, grid, length int64) (all []Reading) {
	calm, meterAlone := 1+20*r.IntN(2), r.IntN(2) == 0
	silent := r.Int64N(length)
	heard := silent + r.Int64N(length/3)
	for tag := range anyTags {
		most := [anyTags]int64{9, 9, 9, 60, 70, 50, 20, 60, 60, 30}[tag] * second * (1 + 2*(grid/(5*second+1)))
		last := [anyTags]float64{mixCount: 900, mixEnergy: 9e7, anyCount: 5, anyEnergy: 5}[tag]
		on, through := r.IntN(2) == 0, tag == mixCount || r.IntN(4) == 0
		if meterAlone {
			through = tag == mixAlive || tag == anyEnergy
		}
		for s := r.Int64N(20e9); s < length; s += 1 + r.Int64N(most) {
			at := epoch + s
			if on {
				at = ceil(at, grid)
			}
			last = anyValue(r, tag, last, calm)
			repeated := len(all) > 0 && all[len(all)-1].Tag == tag && all[len(all)-1].At == at
			if !repeated && (through || s < silent || s >= heard) {
				x := Reading{Tag: tag, At: at, Value: last}
				if x.Mark = anyMark(r, calm); isBad(x) && r.IntN(2) == 0 {
					x.Value = math.NaN()
				}
				all = append(all, x)
			}
			if r.IntN(30*calm) == 0 {
				s += 10*second + r.Int64N(120e9)
			}
		}
	}
	slices.SortStableFunc(all, func(a, b Reading) int { return int(a.At - b.At) })
	return all
}

// anyMark draws the mark of a reading, good for most.
func anyMark(r *rand.Rand, calm int) quality.Mark {
	switch r.IntN(20 * calm) {
	case 0:
		return []quality.Mark{quality.NoValue, quality.Offline, quality.Failed, quality.FunctionCheck}[r.IntN(4)]
	case 1, 2, 3:
		return []quality.Mark{quality.OffSpec, quality.LastUsable, quality.Maintenance}[r.IntN(3)]
	}
	return quality.None
}

// anyValue draws what a tag reads after last.
func anyValue(r *rand.Rand, tag int, last float64, calm int) float64 {
	odd, x := r.IntN(25*calm), r.Float64()
	switch tag {
	case mixFlow, mixTold:
		return []float64{-1, 0, 0.05, 1 + 2*x}[min(odd, 3)]
	case mixInlet, mixOutlet, anyTemperature:
		return []float64{418, 300 + 60*x}[min(odd, 1)] // the first near boiling
	case mixAlive:
		return float64(min(odd, 1))
	case mixCount:
		return register(last, 20*x, odd, 1000)
	case anyCount:
		return register(last, 20*x, odd, 1e4)
	}
	return register(last, 2e6*x, odd, 1e8)
}

// delivered puts readings through in beats, in another order within the lateness, some
// twice and with restarts, and returns the minutes of each load and the state at the end.
func delivered(t *testing.T, r *rand.Rand, cfg Config, readings []Reading, end int64) ([]map[int64]Minute, Snapshot) {
	e := engine(t, cfg)
	type delivery struct {
		Reading
		at int64
	}
	var all []delivery
	for _, x := range readings {
		for range 1 + r.IntN(2) {
			all = append(all, delivery{x, x.At + r.Int64N(lateness)})
		}
	}
	slices.SortStableFunc(all, func(a, b delivery) int { return int(a.at - b.at) })
	minutes := make([]map[int64]Minute, len(cfg.Loads))
	take := func(b Beat) {
		for _, m := range e.Advance(b, nil) {
			if minutes[m.Load] == nil {
				minutes[m.Load] = make(map[int64]Minute)
			}
			if _, twice := minutes[m.Load][m.Start]; twice {
				t.Errorf("minute %d of load %d closed twice", m.Start, m.Load)
			}
			minutes[m.Load][m.Start] = m
		}
	}
	var past []Reading
	var newest int64
	longest := []int{3, 60, 2000}[r.IntN(3)]
	for len(all) > 0 {
		n := min(1+r.IntN(longest), len(all))
		var b Beat
		for _, d := range all[:n] {
			b.Readings = append(b.Readings, d.Reading)
			newest = max(newest, d.At)
		}
		all, past = all[n:], append(past, b.Readings...)
		b.Through = newest - lateness
		take(b)
		if r.IntN(10) == 0 {
			e = resumed(t, e, cfg)
			e.Recall(past)
		}
	}
	take(Beat{nil, end})
	return minutes, e.Snapshot()
}

// Random plants of rates and counters, bridges, witnesses and sources that report on
// change, whose readings come late, twice, in any order and over restarts, are booked as a
// recount of all readings books them that keeps no state: each time to the nanosecond, and
// heat, what lasts of its uncertainty and what does not, and what is compared with a
// witness, minute by minute.
func TestRecount(t *testing.T) { recounted(t, anyPlant) }

// So are those whose signals are tested, by tests that look at all readings at once.
func TestRecountScreened(t *testing.T) { recounted(t, screenedPlant) }

func recounted(t *testing.T, draw func(*rand.Rand) Config) {
	var seen Minute
	for seed := range uint64(200) {
		r := rand.New(rand.NewPCG(seed, 3))
		cfg := draw(r)
		length, rest := int64(600e9), int64(900e9)
		if cfg.Grid < second {
			length, rest = 120e9, 200e9
		}
		readings := anyCourse(r, cfg.Grid, length)
		from := ceil(readings[0].At, cfg.Grid)
		o := recount{cfg: cfg, readings: make([][]Reading, len(cfg.Tags)), from: from, to: ceil(from+length+rest, minute) + cfg.Grid}
		for _, x := range readings {
			o.readings[x.Tag] = append(o.readings[x.Tag], x)
		}
		o.screen()
		minutes, s := delivered(t, r, cfg, readings, o.to)
		for i, l := range s.Loads {
			want := o.account(i)
			what := fmt.Sprintf("seed %d, load %d", seed, i)
			total := want[0]
			if l.Measured != total.Measured || l.Uncertain != total.Uncertain || l.Bridged != total.Bridged || l.Missing != total.Missing || l.Undecided != o.to-o.from-total.Measured-total.Bridged-total.Missing {
				t.Fatalf("%s: %+v, undecided %d; want %+v", what, l.Totals, l.Undecided, total)
			}
			alike(t, what, Minute{Given: l.Given, Taken: l.Taken, BridgedGiven: l.BridgedGiven, BridgedTaken: l.BridgedTaken},
				Minute{Given: total.Given, Taken: total.Taken, BridgedGiven: total.BridgedGiven, BridgedTaken: total.BridgedTaken})
			compareMinutes(t, what, minutes[i], want, l.Undecided > 0)
			seen.Measured += min(total.Measured, total.Bridged, total.Missing, total.Idle)
			seen.Compared += math.Abs(total.Compared)
			seen.Random += total.Random
			seen.Uncertain += min(total.Uncertain, total.Measured-total.Uncertain)
		}
	}
	if seen.Measured == 0 || seen.Compared == 0 || seen.Random == 0 || seen.Uncertain == 0 {
		t.Errorf("the courses drawn do not show everything: %+v", seen)
	}
}

// compareMinutes asserts that the minutes which closed are those wanted. Where time at the
// end is undecided, the last are still open.
func compareMinutes(t *testing.T, what string, got map[int64]Minute, want map[int64]*Minute, open bool) {
	t.Helper()
	var random float64
	for start, w := range want {
		m, ok := got[start]
		random += m.Random
		if start == 0 || open || !ok && w.Measured+w.Bridged == 0 {
			continue
		}
		if m.Measured != w.Measured || m.Bridged != w.Bridged || m.Missing != w.Missing || m.Idle != w.Idle || m.Uncertain != w.Uncertain {
			t.Fatalf("%s: minute %+v, want %+v", what, m, *w)
		}
		w.Random = m.Random // that of a count lies in one of its minutes
		alike(t, what, m, *w)
	}
	if math.Abs(random-want[0].Random) > 1e-9*want[0].Random+1e-3 && !open {
		t.Fatalf("%s: variance %g, want %g", what, random, want[0].Random)
	}
}

// alike asserts that heats and uncertainties are the same but for rounding, J.
func alike(t *testing.T, what string, got, want Minute) {
	t.Helper()
	pairs := [][2]float64{
		{got.Given, want.Given}, {got.Taken, want.Taken}, {got.BridgedGiven, want.BridgedGiven}, {got.BridgedTaken, want.BridgedTaken},
		{got.Witness, want.Witness}, {got.Compared, want.Compared},
	}
	for k := range got.Systematic {
		pairs = append(pairs, [2]float64{got.Systematic[k], want.Systematic[k]})
	}
	for _, p := range pairs {
		if !(math.Abs(p[0]-p[1]) <= 1e-9*math.Abs(p[1])+1e-3) {
			t.Fatalf("%s: %+v, want %+v", what, got, want)
		}
	}
}
