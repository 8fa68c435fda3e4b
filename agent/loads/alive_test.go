package loads

import (
	"math"
	"strings"
	"testing"
)

const (
	alive    = 3          // the liveness tag of exceptional
	lifespan = 30         // s for which one sign of life counts
	hours    = 3600.0     // s
	ever     = 1<<63 - 1  // an age that is never reached
	quarter  = 15 * 60.0  // s
	rate160  = 160e3 * 1. // W that at(…, 2, 350, 330) gives
)

// exceptional is the plant whose three tags report by exception, with a liveness tag
// whose readings count for age.
func exceptional(age int64) Config {
	cfg := plant(liquid)
	for i := range cfg.Tags {
		cfg.Tags[i].OnChange, cfg.Tags[i].Alive = true, alive
	}
	cfg.Tags = append(cfg.Tags, Tag{Name: "PLC", MaxAge: age})
	return cfg
}

func sign(s, value float64) Reading { return Reading{Tag: alive, At: through(s), Value: value} }

// beating are heartbeats every ten seconds in [from, to].
func beating(from, to float64) (all []Reading) {
	for s := from; s <= to; s += 10 {
		all = append(all, sign(s, 1))
	}
	return all
}

func checkFigure(t *testing.T, e *Engine, fault Fault, reason string) {
	t.Helper()
	f := e.Snapshot().Loads[0].Figure
	if f.Fault != fault || f.Reason != reason {
		t.Errorf("fault %v, reason %q; want %v, %q", f.Fault, f.Reason, fault, reason)
	}
}

// One reading, and a heartbeat for six hours: the duty holds as long as the heart beats,
// and for one lifespan more.
func TestOnChangeHoldsWhileTheHeartBeats(t *testing.T) {
	e := engine(t, exceptional(lifespan*second))
	e.Advance(Beat{append(at(0, 2, 350, 330), beating(0, 0)...), through(1)}, nil)
	for s := 10.0; s <= 6*hours; s += 10 {
		e.Advance(Beat{beating(s, s), through(s)}, nil)
	}
	checkFigure(t, e, NoFault, "")
	if got, want := e.Snapshot().Loads[0].Until, through(6*hours-1+lifespan); got != want {
		t.Errorf("good until %g s, want %g", float64(got-epoch)/1e9, float64(want-epoch)/1e9)
	}
	e.Advance(Beat{nil, through(7 * hours)}, nil)
	checkFigure(t, e, Stale, `tag "PLC", the sign of life of "FT", is older than 30 s`)
	l := e.Snapshot().Loads[0]
	near(t, "given", l.Given, rate160*(6*hours+lifespan), 1e-3)
	if got, want := l.Missing, int64(hours-lifespan)*second; got != want {
		t.Errorf("missing %d s, want %d", got/second, want/second)
	}
}

// After a lapse what was held is worth nothing, however lively the source: a new reading
// of every tag is wanted.
func TestAfterALapseANewReadingIsWanted(t *testing.T) {
	e := engine(t, exceptional(lifespan*second))
	e.Advance(Beat{append(at(0, 2, 350, 330), beating(0, 100)...), through(200)}, nil)
	e.Advance(Beat{beating(200, 300), through(300)}, nil)
	checkFigure(t, e, Stale, `tag "FT" has not reported since its source was last gone by tag "PLC"`)
	again := at(310, 3, 350, 330)
	e.Advance(Beat{append(again[:2:2], beating(310, 320)...), through(321)}, nil)
	checkFigure(t, e, Stale, `tag "TO" has not reported since its source was last gone by tag "PLC"`)
	e.Advance(Beat{append(beating(330, 330), Reading{Tag: outlet, At: through(330), Value: 330}), through(340)}, nil)
	checkFigure(t, e, NoFault, "")
	l := e.Snapshot().Loads[0]
	near(t, "given", l.Given, rate160*(100+lifespan)+240e3*10, 1e-3)
}

// A source that says that it goes is not believed from the next grid point on, and what
// comes before it says that it is back does not hold either.
func TestOnChangeGoesWithItsSource(t *testing.T) {
	e := engine(t, exceptional(ever))
	e.Advance(Beat{append(at(0, 2, 350, 330), sign(0, 1)), through(1)}, nil)
	e.Advance(Beat{nil, through(5 * hours)}, nil)
	checkFigure(t, e, NoFault, "")
	if got := e.Snapshot().Loads[0].Until; got != math.MaxInt64 {
		t.Errorf("good until %d, want for ever", got)
	}
	e.Advance(Beat{[]Reading{sign(5*hours, 0)}, through(5*hours + quarter)}, nil)
	checkFigure(t, e, Stale, `tag "PLC" says that the source of "FT" has gone`)
	e.Advance(Beat{append(at(6*hours, 2, 350, 330), sign(6*hours+60, 1)), through(6*hours + 61)}, nil)
	checkFigure(t, e, Stale, `tag "FT" has not reported since its source was last gone by tag "PLC"`)
	e.Advance(Beat{at(6*hours+70, 2, 350, 330), through(6*hours + 71)}, nil)
	checkFigure(t, e, NoFault, "")
	near(t, "given", e.Snapshot().Loads[0].Given, rate160*(5*hours+1), 1e-3)
}

// A source that comes back may tell its values first and beat a moment later: a reading
// is a sign of life of its own. Without a heart ever heard nothing holds.
func TestAReadingIsASignOfLife(t *testing.T) {
	e := engine(t, exceptional(lifespan*second))
	e.Advance(Beat{at(0, 2, 350, 330), through(20)}, nil)
	checkFigure(t, e, NoReading, `tag "PLC" has no reading yet, and only it tells whether "FT" still holds`)
	e.Advance(Beat{beating(20, 20), through(21)}, nil)
	checkFigure(t, e, NoFault, "")
	e.Advance(Beat{append(at(1000, 2, 350, 330), beating(1025, 1025)...), through(1050)}, nil)
	checkFigure(t, e, NoFault, "")
	near(t, "given", e.Snapshot().Loads[0].Given, rate160*(lifespan+50), 1e-3)

	late := engine(t, exceptional(lifespan*second))
	late.Advance(Beat{append(at(0, 2, 350, 330), beating(40, 40)...), through(41)}, nil)
	checkFigure(t, late, Stale, `tag "FT" has not reported since its source was last gone by tag "PLC"`)
}

// A week without a word is passed over at one go, or second by second, or with a restart
// in it: the lapse is found in each.
func TestLapseInALongSilence(t *testing.T) {
	const week = 7 * 24 * hours
	var want []uint64
	for _, step := range []float64{week, 7 * hours, 61} {
		e := engine(t, exceptional(lifespan*second))
		e.Advance(Beat{append(at(0, 2, 350, 330), beating(0, 0)...), through(1)}, nil)
		for s := step; s < week; s += step {
			e.Advance(Beat{nil, through(s)}, nil)
			if step == 7*hours {
				e = restarted(t, e, exceptional(lifespan*second))
			}
		}
		e.Advance(Beat{beating(week, week+20), through(week + 30)}, nil)
		checkFigure(t, e, Stale, `tag "FT" has not reported since its source was last gone by tag "PLC"`)
		got := fingerprint(e)
		if want == nil {
			want = got
		}
		for i := range got {
			if got[i] != want[i] {
				t.Errorf("steps of %g s: %x, want %x", step, got, want)
				break
			}
		}
	}
}

// Beats that were booked elsewhere are looked through for a lapse all the same.
func TestAdoptFindsTheLapse(t *testing.T) {
	e := engine(t, exceptional(lifespan*second))
	e.Advance(Beat{append(at(0, 2, 350, 330), beating(0, 0)...), through(10)}, nil)
	e.Adopt(Beat{beating(100, 200), through(200)})
	e.Advance(Beat{nil, through(210)}, nil)
	checkFigure(t, e, Stale, `tag "FT" has not reported since its source was last gone by tag "PLC"`)
}

func restarted(t *testing.T, e *Engine, cfg Config) *Engine {
	t.Helper()
	state, err := e.Save()
	if err != nil {
		t.Fatal(err)
	}
	next := engine(t, cfg)
	if err := next.Restore(state); err != nil {
		t.Fatal(err)
	}
	return next
}

func TestLivenessTagsThatCannotBe(t *testing.T) {
	for _, tt := range []struct {
		change func(*Config)
		want   string
	}{
		{func(c *Config) { c.Tags[inlet].Alive = 9 }, `tag "TI": reports by exception, and its liveness tag has index 9; there are 4 tags`},
		{func(c *Config) { c.Tags[inlet].Alive = -1 }, "index -1"},
		{func(c *Config) { c.Tags[inlet].Alive = inlet }, `and so does its liveness tag "TI"`},
		{func(c *Config) { c.Tags[inlet].Alive = outlet }, `and so does its liveness tag "TO"`},
	} {
		cfg := exceptional(minute)
		tt.change(&cfg)
		if _, err := New(cfg); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("error %v, want one with %q", err, tt.want)
		}
	}
}
