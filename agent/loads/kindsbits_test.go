package loads

import (
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// kinds is a plant of everything that remembers: a stream with all corrections, one
// without, a vessel; temperatures by exception where so said; gaps bridged.
func kinds(onChange bool) Config {
	cfg := plant(liquid)
	cfg.Bridge = 3 * minute
	cfg.Tags = append(cfg.Tags, Tag{Name: "PLC", MaxAge: 20 * second})
	for _, i := range []int{inlet, outlet} {
		cfg.Tags[i].OnChange, cfg.Tags[i].Alive = onChange, alive
	}
	corrected := cfg.Loads[0]
	corrected.Name = "corrected"
	corrected.Stream.Corrections = Corrections{Pump: Constant(500), HasPump: true, Hold: 0.03, Stored: 1e6, StoredOver: minute}
	v := tank()
	v.Temperature, v.Content, v.Over, v.Still = FromTag(inlet), FromTag(flow), 45*second, 0.3
	cfg.Loads = append(cfg.Loads, corrected, Load{Name: "tank", Vessel: &v})
	return cfg
}

// signs draws the readings of the liveness tag.
func signs(t *rapid.T) (all []Reading) {
	for s := rapid.Int64Range(0, 20e9).Draw(t, "first sign"); s < 600e9; {
		value := 1.0
		if rapid.IntRange(0, 15).Draw(t, "gone") == 0 {
			value = 0
		}
		all = append(all, Reading{Tag: alive, At: epoch + s, Value: value})
		s += rapid.Int64Range(2e9, 15e9).Draw(t, "step")
		if rapid.IntRange(0, 15).Draw(t, "lapse") == 0 {
			s += 40e9
		}
	}
	return all
}

// What a load remembers of the past makes no difference to the bits either, wherever the
// beats are cut, wherever a restart falls, and whether or not another load has a figure
// meanwhile.
func TestKindsSameBits(t *testing.T) {
	seen := make(map[string]map[Fault]int) // of each load
	rapid.Check(t, func(t *rapid.T) {
		cfg := kinds(rapid.Bool().Draw(t, "on change"))
		cfg.Loads[2].Vessel.Still = 1e-4
		if rapid.Bool().Draw(t, "screened") {
			screenAll(&cfg)
		}
		if i := rapid.IntRange(0, 3*len(cfg.Loads)).Draw(t, "alone"); i < len(cfg.Loads) {
			cfg.Loads = cfg.Loads[i : i+1]
		}
		readings := slices.Concat(course(t), signs(t))
		slices.SortStableFunc(readings, func(a, b Reading) int { return int(a.At - b.At) })
		plain, _ := New(cfg)
		run(plain, readings, func() int {
			for i := range plain.loads {
				if seen[cfg.Loads[i].Name] == nil {
					seen[cfg.Loads[i].Name] = make(map[Fault]int)
				}
				seen[cfg.Loads[i].Name][plain.loads[i].figure.Fault]++
			}
			return 1
		})
		want := fingerprint(plain)

		e, _ := New(cfg)
		for len(readings) > 0 {
			n := rapid.IntRange(1, min(len(readings), 200)).Draw(t, "stretch")
			cut := func() int { return rapid.IntRange(1, 60).Draw(t, "beat") }
			for part := readings[:n]; len(part) > 0; {
				k := min(cut(), len(part))
				e.Advance(Beat{part[:k], part[k-1].At - lateness}, nil)
				part = part[k:]
			}
			state, err := e.Save()
			if err != nil {
				t.Fatal(err)
			}
			e, _ = New(cfg)
			if err := e.Restore(state); err != nil {
				t.Fatal(err)
			}
			readings = readings[n:]
		}
		e.Advance(Beat{nil, epoch + 700*second}, nil)
		if got := fingerprint(e); !slices.Equal(got, want) {
			t.Fatalf("by other beats and with restarts: %x, want %x", got, want)
		}
	})
	for name, faults := range map[string][]Fault{"boiler": {NoFault, Stale, BadReading}, "corrected": {NoFault, Stale, BadReading, Fitting}, "tank": {NoFault, Stale, BadReading, Fitting, Moving}} {
		for _, f := range faults {
			if seen[name][f] == 0 {
				t.Errorf("%s: fault %q was never seen", name, f)
			}
		}
	}
}
