package loads

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"testing"
)

// everything is a plant in which all that the accounts know is switched on: tested and
// marked signals, sensors beside each other, a pump, sources that report on change, totals
// and amounts with witnesses, bridges, a hold, stored heat, a vessel, and a meter that is
// calibrated at another density.
func everything(r *rand.Rand) Config {
	cfg := screenedPlant(r)
	cfg.Grid, cfg.Bridge = []int64{second, 5 * second}[r.IntN(2)], []int64{20 * second, 3 * minute}[r.IntN(2)]
	for i := range cfg.Tags {
		cfg.Tags[i].Meaning = "as told"
		cfg.Tags[i].MaxAge = []int64{12 * second, 30 * second, minute}[r.IntN(3)]
	}
	cfg.Tags[mixCount].Counter = &Counter{Largest: 50, Each: true}
	v := tank()
	v.Temperature, v.Content, v.Over, v.Still = FromTag(anyTemperature), FromTag(mixTold), 2*minute, 0.9
	cfg.Loads = append(cfg.Loads, Load{Name: "vessel", Vessel: &v, Witness: FromTag(mixEnergy), HasWitness: true})
	of := func(name string, flow int) *Stream {
		l := Load{Name: name, Stream: plant(liquid).Loads[0].Stream, Witness: FromTag(anyEnergy), HasWitness: true}
		l.Stream.Flow, l.Stream.Inlet, l.Stream.Outlet = FromTag(flow), FromTag(mixInlet), FromTag(mixOutlet)
		l.Stream.IdleBelow = 0.1
		cfg.Loads = append(cfg.Loads, l)
		return &cfg.Loads[len(cfg.Loads)-1].Stream
	}
	of("amounts", mixCount)
	of("total on change", anyCount)
	of("calibrated", mixFlow).CalibratedAt = 800
	s := of("corrected", mixFlow)
	s.Corrections = Corrections{Pump: Constant(500), HasPump: true, Hold: 0.03, Stored: 1e6, StoredOver: minute}
	s.Pair, s.CalibratedAt = 0.5, 1200
	return cfg
}

// story is all that came of readings, as it reads.
func story(minutes []map[int64]Minute, s Snapshot) (all []string) {
	for i, of := range minutes {
		for at, m := range of {
			all = append(all, fmt.Sprintf("load %d, minute %d: %+v", i, at, m))
		}
	}
	slices.Sort(all)
	for _, l := range s.Loads {
		l.Figure.Until = 0 // when the figure is next worked is not part of it
		all = append(all, fmt.Sprintf("%+v", l))
	}
	return all
}

// With everything switched on at once, the order within the lateness, the cut into beats,
// what is delivered twice and restarts change no bit of a minute, a register or a figure;
// at each moment the times add up to the period, and the minutes to the registers.
func TestEverythingSameBits(t *testing.T) {
	var measured, bridged, missing, uncertain int64
	for seed := range uint64(30) {
		r := rand.New(rand.NewPCG(seed, 12))
		cfg := everything(r)
		readings := anyCourse(r, cfg.Grid, int64(900*second))
		end := epoch + 1200*second
		plain := engine(t, cfg)
		minutes := make([]map[int64]Minute, len(cfg.Loads))
		for i := range minutes {
			minutes[i] = make(map[int64]Minute)
		}
		begun := ceil(readings[0].At, cfg.Grid)
		for i := range len(readings) + 1 {
			b := Beat{nil, end}
			if i < len(readings) {
				b = Beat{readings[i : i+1], readings[i].At - lateness}
			}
			for _, m := range plain.Advance(b, nil) {
				minutes[m.Load][m.Start] = m
			}
			s := plain.Snapshot()
			for k, l := range s.Loads {
				if sum := l.Measured + l.Bridged + l.Missing + l.Undecided; s.Through != 0 && sum != s.Through-begun || l.Uncertain > l.Measured {
					t.Fatalf("seed %d, load %d: %+v with %d undecided, of %d", seed, k, l.Totals, l.Undecided, s.Through-begun)
				}
			}
		}
		want := plain.Snapshot()
		addUp(t, fmt.Sprintf("seed %d", seed), minutes, want)
		for _, l := range want.Loads {
			measured, bridged, missing, uncertain = measured+l.Measured, bridged+l.Bridged, missing+l.Missing, uncertain+l.Uncertain
		}
		for range 2 {
			got, s := delivered(t, r, cfg, readings, end)
			a, b := story(minutes, want), story(got, s)
			for i := range a {
				if i >= len(b) || a[i] != b[i] {
					t.Fatalf("seed %d: %d lines\n%s\nwant %d\n%s", seed, len(b), b[min(i, len(b)-1)], len(a), a[i])
				}
			}
		}
	}
	if min(measured, bridged, missing, uncertain) == 0 {
		t.Errorf("%d ns measured, %d bridged, %d missing, %d uncertain: not everything was shown", measured, bridged, missing, uncertain)
	}
}

// addUp asserts that the minutes add up to the registers, but for what the open minute holds.
func addUp(t *testing.T, what string, minutes []map[int64]Minute, s Snapshot) {
	t.Helper()
	for i, l := range s.Loads {
		var sum Minute
		for _, m := range minutes[i] {
			if m.Uncertain > m.Measured {
				t.Errorf("%s, load %d: minute %+v", what, i, m)
			}
			sum.Measured, sum.Bridged, sum.Uncertain = sum.Measured+m.Measured, sum.Bridged+m.Bridged, sum.Uncertain+m.Uncertain
			sum.Given, sum.Taken = sum.Given+m.Given, sum.Taken+m.Taken
			sum.BridgedGiven, sum.BridgedTaken = sum.BridgedGiven+m.BridgedGiven, sum.BridgedTaken+m.BridgedTaken
		}
		if l.Undecided > 0 {
			continue
		}
		if sum.Measured != l.Measured || sum.Bridged != l.Bridged || sum.Uncertain != l.Uncertain {
			t.Errorf("%s, load %d: minutes %+v, registers %+v", what, i, sum, l.Totals)
		}
		for _, p := range [...][2]float64{{sum.Given, l.Given}, {sum.Taken, l.Taken}, {sum.BridgedGiven, l.BridgedGiven}, {sum.BridgedTaken, l.BridgedTaken}} {
			near(t, what, p[0], p[1], 1e-9*p[1]+1e-6)
		}
	}
}
