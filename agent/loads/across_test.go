package loads

import (
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/screen"
)

func checkMark(t *testing.T, what string, e *Engine, m quality.Mark, by string) {
	t.Helper()
	if f := e.Snapshot().Loads[0].Figure; f.Mark != m || f.By != by {
		t.Errorf("%s: mark %v by %q (fault %v), want %v by %q", what, f.Mark, f.By, f.Fault, m, by)
	}
}

// Two thermometers of 0.3 K and 0.4 K standard uncertainty may be 2·0.5 K apart.
func TestBeside(t *testing.T) {
	for _, turned := range []bool{false, true} {
		cfg := plant(liquid)
		cfg.Tags[inlet].Accuracy.Abs = 0.3 * math.Sqrt(3)
		cfg.Tags = append(cfg.Tags, Tag{Name: "TI-B", MaxAge: 10 * second, Accuracy: Accuracy{Abs: 0.4 * math.Sqrt(3)}})
		const second = 3
		if turned {
			cfg.Tags[second].Beside, cfg.Tags[second].HasBeside = inlet, true
		} else {
			cfg.Tags[inlet].Beside, cfg.Tags[inlet].HasBeside = second, true
		}
		e := engine(t, cfg)
		e.Advance(Beat{at(0, 2, 350, 330), through(1)}, nil)
		checkMark(t, "absent", e, quality.None, "")
		e.Advance(Beat{marked(second, 1, 349.01, quality.None), through(2)}, nil)
		checkMark(t, "near", e, quality.None, "")
		e.Advance(Beat{marked(second, 2, 348.95, quality.None), through(11)}, nil)
		checkMark(t, "apart", e, quality.Disagrees, "TI")
		e.Advance(Beat{nil, through(13)}, nil)
		checkMark(t, "out of age", e, quality.None, "")
		e.Advance(Beat{marked(second, 13, 0, quality.Failed), through(14)}, nil)
		checkMark(t, "bad", e, quality.None, "")
		if l := accounted(t, e, 14, 0, 0, 0); l.Uncertain != 10e9 {
			t.Errorf("%d ns uncertain, want those from 2 to 12 s", l.Uncertain)
		}
	}
}

// A return warmer than the supply of a circuit that gives heat is in the wrong order where
// it is so by more than 2·√2·0.1 K; half of a pair's errors in common, by 2·0.1 K.
func TestOrder(t *testing.T) {
	for _, tt := range []struct {
		name   string
		change func(*Config)
		q, in  float64
		out    float64
		want   quality.Mark
	}{
		{"right", func(*Config) {}, 2, 350, 330, quality.None},
		{"wrong within 2u", func(*Config) {}, 2, 350, 350.27, quality.None},
		{"wrong", func(*Config) {}, 2, 350, 350.29, quality.WrongOrder},
		{"of a pair within 2u", func(c *Config) { c.Loads[0].Stream.Pair = 0.5 }, 2, 350, 350.19, quality.None},
		{"of a pair", func(c *Config) { c.Loads[0].Stream.Pair = 0.5 }, 2, 350, 350.21, quality.WrongOrder},
		{"takes heat, right", func(c *Config) { c.Loads[0].Stream.Gives = false }, 2, 350, 351, quality.None},
		{"takes heat, wrong", func(c *Config) { c.Loads[0].Stream.Gives = false }, 2, 350, 349, quality.WrongOrder},
		{"both ways", func(c *Config) { c.Loads[0].Stream.BothWays = true }, 2, 350, 360, quality.None},
		{"without a flow", func(*Config) {}, 0, 350, 360, quality.None},
		{"no accuracy", func(c *Config) { c.Tags[inlet].Accuracy.Abs, c.Tags[outlet].Accuracy.Abs = 0, 0 }, 2, 350, 360, quality.None},
		{"a constant", func(c *Config) { c.Loads[0].Stream.Inlet = Constant(350) }, 2, 350, 360, quality.None},
	} {
		cfg := plant(liquid)
		cfg.Tags[inlet].Accuracy.Abs, cfg.Tags[outlet].Accuracy.Abs = 0.1*math.Sqrt(3), 0.1*math.Sqrt(3)
		tt.change(&cfg)
		e := engine(t, cfg)
		e.Advance(Beat{at(0, tt.q, tt.in, tt.out), through(1)}, nil)
		by := ""
		if tt.want != quality.None {
			by = "TO"
		}
		checkMark(t, tt.name, e, tt.want, by)
	}
}

// A flow beyond its idle threshold and twice its uncertainty reads where there is nothing
// while the pump stands.
func TestRunning(t *testing.T) {
	const pump = 3
	for _, tt := range []struct {
		name    string
		flow    float64
		running []Reading
		want    quality.Mark
	}{
		{"runs", 2, marked(pump, 0, 1, quality.None), quality.None},
		{"stands", 2, marked(pump, 0, 0, quality.None), quality.NotZero},
		{"stands, and so does the water", 0, marked(pump, 0, 0, quality.None), quality.None},
		{"within the threshold", 0.05, marked(pump, 0, 0, quality.None), quality.None},
		{"within 2u", 0.19, marked(pump, 0, 0, quality.None), quality.None},
		{"beyond", 0.21, marked(pump, 0, 0, quality.None), quality.NotZero},
		{"not told", 2, nil, quality.None},
		{"bad", 2, marked(pump, 0, 0, quality.Failed), quality.None},
	} {
		cfg := plant(liquid)
		cfg.Tags[flow].Accuracy.Abs = 0.1 * math.Sqrt(3)
		cfg.Tags = append(cfg.Tags, Tag{Name: "P", MaxAge: 10 * second})
		cfg.Loads[0].Running, cfg.Loads[0].HasRunning, cfg.Loads[0].Stream.IdleBelow = FromTag(pump), true, 0.06
		e := engine(t, cfg)
		e.Advance(Beat{append(at(0, tt.flow, 350, 330), tt.running...), through(5)}, nil)
		by := ""
		if tt.want != quality.None {
			by = "FT"
		}
		checkMark(t, tt.name, e, tt.want, by)
		e.Advance(Beat{nil, through(12)}, nil)
		checkMark(t, tt.name+", not heard of any more", e, quality.None, "")
	}
}

// What the tests on one signal find is in the figure; a spike is not used, but the value
// before it, whose time is uncertain, and nothing is fitted to it.
func TestScreened(t *testing.T) {
	cfg := plant(liquid)
	cfg.Tags[inlet].Screen = &screen.Limits{Low: 300, High: 360, HasRange: true, Spikes: true, Resolution: 0.1, Gap: cfg.Tags[inlet].MaxAge}
	cfg.Tags[inlet].MaxAge = 2 * second
	e := engine(t, cfg)
	for s := 0.0; s < 20; s++ {
		in := 350 + 0.1*float64(int(s)%2)
		if s >= 10 && s < 13 {
			in = 355 // a spike of three readings
		}
		e.Advance(Beat{at(s, 2, in, 330), through(s + 1)}, nil)
		f := e.Snapshot().Loads[0].Figure
		want, mark := in, quality.None
		if s >= 10 && s < 13 {
			want, mark = 350.1, quality.Spike
		}
		if near(t, "inlet", f.Inlet, want, 1e-9); f.Mark != mark {
			t.Errorf("%g s: mark %v, want %v", s, f.Mark, mark)
		}
	}
	l := accounted(t, e, 20, 0, 0, 0)
	if l.Uncertain != 3*second {
		t.Errorf("%d ns uncertain, want 3 s", l.Uncertain)
	}
	if sc := e.tags[inlet].Scatter; sc.variance() > 0.1*0.1 {
		t.Errorf("variance of a reading %g: the spike is in it", sc.variance())
	}
	for s := 20.0; s < 30; s++ {
		e.Advance(Beat{at(s, 2, 365, 330), through(s + 1)}, nil)
	}
	if f := e.Snapshot().Loads[0].Figure; f.Inlet != 365 || f.Mark != quality.Implausible || f.By != "TI" {
		t.Errorf("inlet %g, mark %v by %q", f.Inlet, f.Mark, f.By)
	}
	counts := map[quality.Mark]uint64{}
	for _, d := range e.Snapshot().Tags[inlet].Doubted {
		counts[d.Mark] = d.Readings
	}
	if counts[quality.Spike] != 3 || counts[quality.Implausible] != 10 || len(counts) != 2 {
		t.Errorf("doubted %v, want 3 spikes and 10 implausible", counts)
	}
}

// What cannot be tested is said.
func TestCheckOfTestsAcrossTags(t *testing.T) {
	for want, change := range map[string]func(*Config){
		"counter whose readings are tested": func(c *Config) {
			c.Tags[inlet].Counter, c.Tags[inlet].Screen = &Counter{Each: true}, &screen.Limits{Spikes: true}
		},
		"sensor beside it has index 9": func(c *Config) { c.Tags[inlet].Beside, c.Tags[inlet].HasBeside = 9, true },
		"sensor beside it has index 1": func(c *Config) { c.Tags[inlet].Beside, c.Tags[inlet].HasBeside = 1, true },
		"running: ":                    func(c *Config) { c.Loads[0].Running, c.Loads[0].HasRunning = Constant(1), true },
		"bypass: ":                     func(c *Config) { c.Loads[0].Bypass, c.Loads[0].HasBypass = Constant(1), true },
	} {
		cfg := plant(liquid)
		change(&cfg)
		if _, err := New(cfg); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%v, want an error with %q", err, want)
		}
	}
}

// oddCourse draws ten minutes of a plant that runs calmly, with odd readings, steps, standstills
// and sources that say what they think of them.
func oddCourse(r *rand.Rand) (all []Reading) {
	for tag, size := range []float64{flow: 1, inlet: 10, outlet: 10} {
		level, still := 3*size, false
		for s := r.Int64N(2e9); s < 600e9; s += 5e8 + r.Int64N(2e9) {
			switch r.IntN(60) {
			case 0:
				level = size * (2 + 2*r.Float64())
			case 1:
				still = !still
			}
			v := level
			if !still {
				v += 0.02 * size * r.NormFloat64()
			}
			if r.IntN(30) == 0 {
				v += size
			}
			x := Reading{Tag: tag, At: epoch + s, Value: v, Mark: anyMark(r, 5)}
			if tag != flow {
				x.Value += 300
			}
			all = append(all, x)
		}
	}
	slices.SortStableFunc(all, func(a, b Reading) int { return int(a.At - b.At) })
	return all
}

// What the tests find is the same to the bit whatever the order within the lateness, the
// cut into beats, repeats and restarts.
func TestScreensSameBits(t *testing.T) {
	marks := make(map[quality.Mark]bool)
	for seed := range uint64(60) {
		r := rand.New(rand.NewPCG(seed, 9))
		cfg := kinds(false)
		screenAll(&cfg)
		cfg.Tags[inlet].HasBeside = seed%2 == 0
		cfg.Tags = append(cfg.Tags, Tag{Name: "P", MaxAge: 30 * second})
		cfg.Loads[0].Running, cfg.Loads[0].HasRunning = FromTag(len(cfg.Tags)-1), true
		cfg.Loads[0].Bypass, cfg.Loads[0].HasBypass, cfg.Loads[0].Settles = FromTag(len(cfg.Tags)-1), true, 15*second
		readings := oddCourse(r)
		for i := range 60 {
			readings = append(readings, Reading{Tag: len(cfg.Tags) - 1, At: epoch + int64(i)*10*second, Value: float64(r.IntN(3))})
		}
		slices.SortStableFunc(readings, func(a, b Reading) int { return int(a.At - b.At) })
		plain := engine(t, cfg)
		for _, x := range readings {
			plain.Advance(Beat{[]Reading{x}, x.At - lateness}, nil)
			for i := range plain.loads {
				marks[plain.loads[i].figure.Mark] = true
			}
		}
		end := epoch + 700*second
		plain.Advance(Beat{nil, end}, nil)
		_, s := delivered(t, r, cfg, readings, end)
		if got, want := bitsOf(s), fingerprint(plain); !slices.Equal(got, want) {
			t.Fatalf("seed %d: %x, want %x", seed, got, want)
		}
	}
	for _, m := range []quality.Mark{quality.OffSpec, quality.Implausible, quality.TooFast, quality.Stuck, quality.Spike, quality.Disagrees, quality.WrongOrder, quality.NotZero} {
		if !marks[m] {
			t.Errorf("no figure was %v", m)
		}
	}
}

// A minute has the worst mark of the readings that it used, and the first tag that had it.
func TestMarkOfAMinute(t *testing.T) {
	e := engine(t, plant(liquid))
	var minutes []Minute
	for s := 0.0; s < 300; s += 5 {
		in := at(s, 2, 350, 330)
		if s >= 130 && s < 140 {
			in[2].Mark = quality.Substitute
		}
		minutes = e.Advance(Beat{in, through(s + 4)}, minutes)
	}
	var marked int
	for _, m := range minutes {
		if m.Mark == quality.None && m.By == "" && m.Uncertain == 0 {
			continue
		}
		marked++
		if m.Mark != quality.Substitute || m.By != "TO" || m.Uncertain == 0 {
			t.Errorf("minute %d: %v by %q, %d ns uncertain", m.Start, m.Mark, m.By, m.Uncertain)
		}
	}
	if marked == 0 || marked > 2 || len(minutes) < 4 {
		t.Errorf("%d of %d minutes are marked, want the one or two that hold the 10 s", marked, len(minutes))
	}
}

// While nothing heats or cools the stream its ends are alike, once they have had the time for it.
func TestBypass(t *testing.T) {
	const valve = 3
	open := func(at, value float64) []Reading { return marked(valve, at, value, quality.None) }
	for _, tt := range []struct {
		name   string
		apart  float64 // K
		valve  []Reading
		pair   float64
		want   quality.Mark
		at     float64 // s, when it is looked at
		settle int64
	}{
		{"open for long", 1.2, open(0, 1), 0, quality.NotZero, 8, 5},
		{"open from 95 % on", 1.2, open(0, 0.95), 0, quality.NotZero, 8, 5},
		{"not quite open", 1.2, open(0, 0.94), 0, quality.None, 8, 5},
		{"shut", 1.2, open(0, 0), 0, quality.None, 8, 5},
		{"not settled", 1.2, open(0, 1), 0, quality.None, 5, 5},
		{"settled just now", 1.2, open(0, 1), 0, quality.NotZero, 6, 5},
		{"within 2u", 1.1, open(0, 1), 0, quality.None, 8, 5}, // 2·0.4·√2 = 1.13
		{"beyond, of a pair", 1.1, open(0, 1), 0.5, quality.NotZero, 8, 5},
		{"told again", 1.2, append(open(0, 1), open(4, 1)...), 0, quality.NotZero, 8, 5},
		{"shut meanwhile", 1.2, append(append(open(0, 1), open(2, 0)...), open(4, 1)...), 0, quality.None, 8, 5},
		{"and open for long again", 1.2, append(append(open(0, 1), open(2, 0)...), open(4, 1)...), 0, quality.NotZero, 10, 5},
		{"bad meanwhile", 1.2, append(append(open(0, 1), marked(valve, 2, 1, quality.Failed)...), open(4, 1)...), 0, quality.None, 8, 5},
		{"not told", 1.2, nil, 0, quality.None, 8, 5},
		{"told too long ago", 1.2, open(0, 1), 0, quality.None, 11, 5},
	} {
		cfg := plant(liquid)
		for _, end := range []int{inlet, outlet} {
			cfg.Tags[end].MaxAge, cfg.Tags[end].Accuracy.Abs = 60*second, 0.4*math.Sqrt(3)
		}
		cfg.Tags[flow].MaxAge = 60 * second
		cfg.Tags = append(cfg.Tags, Tag{Name: "V", MaxAge: 10 * second})
		l := &cfg.Loads[0]
		l.Bypass, l.HasBypass, l.Settles, l.Stream.Pair = FromTag(valve), true, tt.settle*second, tt.pair
		e := engine(t, cfg)
		e.Advance(Beat{append(at(0, 2, 350, 350-tt.apart), tt.valve...), through(tt.at)}, nil)
		by := ""
		if tt.want != quality.None {
			by = "TO"
		}
		checkMark(t, tt.name, e, tt.want, by)
	}
}
