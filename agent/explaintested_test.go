package agent

import (
	"fmt"
	"math"
	"math/rand/v2"
	"path/filepath"
	"strings"
	"testing"

	"heatreeve/agent/loads"
	"heatreeve/configs"
	"heatreeve/ingest"
	"heatreeve/ingest/quality"
	"heatreeve/store"
)

// testedTags are those of a load all of whose signals are tested, and what they read about.
var testedTags = map[string]struct{ about, noise float64 }{
	"network/supply temperature":   {368, 0.05},
	"network/supply temperature B": {368, 0.05},
	"network/return temperature":   {328, 0.05},
	"network/flow":                 {0.028, 1e-4},
	"network/pump":                 {0.8, 0},
	"network/pressure":             {7e5, 100},
}

// What tests and sources say of readings is explained as it was booked, to the last bit of
// figure and mark: spikes, steps, signals that stand, sensors that disagree, a flow without
// a pump, and readings without a number.
func TestMarksAreExplainedAsTheyWereBooked(t *testing.T) {
	text, err := configs.Files.ReadFile("tarnholt-heat-works.yaml")
	if err != nil {
		t.Fatal(err)
	}
	s := parsed(t, strings.Replace(string(text), "stuck: 30 min", "stuck: 40 min", 1))
	l, shut := open(t, s, filepath.Join(t.TempDir(), HistoryFile), store.Options{})
	defer shut()
	r := rand.New(rand.NewPCG(3, 4))
	shift, still := make(map[string]float64), make(map[string]bool)
	booked := make(map[int64]loads.Figure)
	const seconds = 6 * 3600
	for i := range int64(seconds) {
		now := clock.UnixNano() + i*sec
		var in []ingest.Reading
		for k := range s.Tags {
			name := s.Tags[k].Name
			of, ok := testedTags[name]
			if !ok || i%4 != int64(k%4) || r.IntN(300) == 0 {
				continue
			}
			size := 20 * of.noise
			if r.IntN(900) == 0 {
				still[name] = !still[name]
			}
			if !still[name] && r.IntN(250) == 0 {
				shift[name] = size * r.NormFloat64()
			}
			x := ingest.Reading{Tag: k, At: now - r.Int64N(sec), Stamped: true, Value: of.about + shift[name]}
			if !still[name] {
				x.Value += of.noise * r.NormFloat64()
				if r.IntN(30) == 0 {
					x.Value += 3 * size
				}
			}
			switch r.IntN(50) {
			case 1:
				x.Value, x.Mark = math.NaN(), quality.NoValue
			case 2, 3:
				x.Mark = quality.Substitute
			}
			if name == "network/pump" && i/600%4 == 3 && x.Mark != quality.NoValue {
				x.Value = 0
			}
			in = append(in, x)
		}
		l.beat(in, now)
		if i%337 == 0 && i > 600 {
			f := l.accounts.engine.Basis(0).Figure
			booked[f.At] = f
		}
	}
	if err := l.commit(clock, true); err != nil {
		t.Fatal(err)
	}
	seen := make(map[quality.Mark]bool)
	for at, want := range booked {
		x := newReplay(l.store, s, 0)
		if err := x.collect(at); err != nil {
			t.Fatal(err)
		}
		y, err := x.run(t.Context(), at)
		if err != nil {
			t.Fatal(err)
		}
		got := y.Basis.Figure
		got.Until, want.Until = 0, 0
		if fmt.Sprintf("%+v", got) != fmt.Sprintf("%+v", want) {
			t.Errorf("at %d s: explained\n%+v\nwas\n%+v", (at-clock.UnixNano())/sec, got, want)
		}
		seen[want.Mark] = true
	}
	for _, m := range []quality.Mark{quality.None, quality.NoValue, quality.Substitute, quality.Spike, quality.Stuck, quality.Disagrees, quality.NotZero} {
		if !seen[m] {
			t.Errorf("no figure was %v", m)
		}
	}
}
