package agent

import (
	"bytes"
	"encoding/gob"
	"maps"
	"math/rand/v2"
	"reflect"
	"slices"
	"testing"
	"time"

	"heatreeve/agent/demo"
	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/configs"
)

// aDay is what the invented plant has to say from half past five on, every ten seconds, for
// 26 hours: the ramp of the morning, a pump that stops, an exchanger that fouls, the night and
// the cleaning.
func aDay(t *testing.T, s *site.Site) (readings []loads.Reading, from, to int64) {
	t.Helper()
	p, err := demo.NewPlant(s, 7)
	if err != nil {
		t.Fatal(err)
	}
	start := time.Date(2026, 12, 1, 5, 30, 0, 0, time.UTC).UnixNano()
	const step, span = 10 * time.Second, 26 * time.Hour
	for at := time.Duration(0); at < span; at += step {
		samples, err := p.At(at)
		if err != nil {
			t.Fatal(err)
		}
		for _, x := range samples {
			if tag := &s.Tags[x.Tag]; x.Condition == demo.Sends {
				readings = append(readings, loads.Reading{Tag: x.Tag, At: start + int64(at), Value: x.Value*tag.Scale + tag.Offset})
			}
		}
	}
	return readings, start, start + int64(span)
}

// course is what judges made of a plant's readings.
type course struct {
	state    design.Saved
	warnings []design.Warning // that came and went
	expected map[loadMinute]expectation
}

type loadMinute struct {
	load  int
	start int64
}

// judged puts readings through accounts in beats. Where chance is given, readings arrive in any order within
// the lateness, beats are of any length, and the accounts are saved and restored at times.
func judged(t *testing.T, s *site.Site, readings []loads.Reading, from, to int64, chance *rand.Rand) course {
	t.Helper()
	open := func() *accounts {
		a, err := newAccounts(plantOf(s), designOf(s), s.Digest, s.Zone)
		if err != nil {
			t.Fatal(err)
		}
		return a
	}
	a := open()
	arrivals := slices.Clone(readings)
	lateness := int64(0)
	if chance != nil {
		lateness = int64(30 * time.Second)
		arrival := make(map[loads.Reading]int64, len(arrivals))
		for _, r := range arrivals {
			arrival[r] = r.At + chance.Int64N(lateness)
		}
		slices.SortStableFunc(arrivals, func(x, y loads.Reading) int { return int(arrival[x] - arrival[y]) })
	}
	c := course{expected: make(map[loadMinute]expectation)}
	advance := func(b loads.Beat) {
		for i, m := range a.advance(b) {
			c.expected[loadMinute{m.Load, m.Start}] = a.expected[i]
		}
		c.warnings = append(c.warnings, a.verdicts.Changed()...)
	}
	for at := from; at < to; {
		step := int64(time.Minute)
		if chance != nil {
			step = 1 + chance.Int64N(int64(20*time.Minute))
		}
		at = min(to, at+step)
		n := slices.IndexFunc(arrivals, func(r loads.Reading) bool { return r.At >= at })
		if n < 0 {
			n = len(arrivals)
		}
		advance(loads.Beat{Readings: arrivals[:n], Through: at - lateness})
		arrivals = arrivals[n:]
		if chance != nil && chance.IntN(10) == 0 {
			state, err := a.save()
			if err != nil {
				t.Fatal(err)
			}
			a = open()
			if same, err := a.restore(state); err != nil || !same {
				t.Fatalf("restored: same %v, %v", same, err)
			}
		}
	}
	advance(loads.Beat{Readings: arrivals, Through: to})
	c.state = a.verdicts.Save()
	return c
}

// A day's verdicts, their grounds, the warnings and what was expected are the same whichever way the readings
// arrived, however the beats were cut, and however often the agent was started anew.
func TestVerdictsAreTheSame(t *testing.T) {
	s := parsed(t, string(configs.Demo))
	readings, from, to := aDay(t, s)
	all := judged(t, s, readings, from, to, nil)
	want := all.state
	if len(all.warnings) < 2 {
		t.Fatalf("%d warnings came and went in a day in which an exchanger fouls and is cleaned, want 2 or more", len(all.warnings))
	}
	for seed := range uint64(4) {
		one := judged(t, s, readings, from, to, rand.New(rand.NewPCG(seed, 1)))
		got := one.state
		for name, j := range want.Judges {
			if other := got.Judges[name]; kept(t, other) != kept(t, j) {
				t.Errorf("seed %d, load %q: another state of the verdict", seed, name)
			}
		}
		for name, x := range want.Exchanges {
			if other := got.Exchanges[name]; kept(t, other) != kept(t, x) {
				t.Errorf("seed %d, exchanger %q: another state", seed, name)
			}
		}
		if len(want.Exchanges) == 0 {
			t.Error("the plant has no exchanger to compare")
		}
		if !reflect.DeepEqual(one.warnings, all.warnings) {
			t.Errorf("seed %d: warnings\n%+v\nwant\n%+v", seed, one.warnings, all.warnings)
		}
		if !maps.Equal(one.expected, all.expected) {
			t.Errorf("seed %d: not the same was expected of all %d minutes", seed, len(all.expected))
		}
	}
}

// kept is a state as a checkpoint holds it.
func kept(t *testing.T, state any) string {
	t.Helper()
	var b bytes.Buffer
	if err := gob.NewEncoder(&b).Encode(state); err != nil {
		t.Fatal(err)
	}
	return b.String()
}
