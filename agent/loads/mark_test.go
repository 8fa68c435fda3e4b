package loads

import (
	"math"
	"reflect"
	"testing"

	"heatreeve/ingest/quality"
)

// marked sets one tag at epoch+s seconds to a value with a mark.
func marked(tag int, s, value float64, m quality.Mark) []Reading {
	return []Reading{{Tag: tag, At: through(s), Value: value, Mark: m}}
}

// From a bad reading on the tag has no value, whatever the number beside it, and the time
// is missing until a better one comes.
func TestBadReadingEndsTheHold(t *testing.T) {
	for _, value := range []float64{math.NaN(), 350, 1e300} {
		e := engine(t, plant(liquid))
		e.Advance(Beat{append(at(0, 2, 350, 330), marked(inlet, 20, value, quality.Failed)...), through(30)}, nil)
		checkFigure(t, e, BadReading, `tag "TI" is bad: failure`)
		accounted(t, e, 20, 0, 10, 0)
		f := e.Snapshot().Loads[0].Figure
		if f.Mark != quality.Failed || f.By != "TI" || f.Quality() != quality.Bad {
			t.Errorf("mark %v by %q, quality %v", f.Mark, f.By, f.Quality())
		}
		e.Advance(Beat{at(40, 2, 350, 330), through(50)}, nil)
		l := accounted(t, e, 30, 0, 20, 0)
		near(t, "given", l.Given, 160e3*30, 1e-6)
		if l.Uncertain != 0 || l.Figure.Quality() != quality.Good {
			t.Errorf("%d ns uncertain, quality %v", l.Uncertain, l.Figure.Quality())
		}
		want := []Doubted{{quality.Failed, 1}}
		if got := e.Snapshot().Tags[inlet].Doubted; !reflect.DeepEqual(got, want) {
			t.Errorf("doubted %v, want %v", got, want)
		}
	}
}

// A bad reading that is older than its tag's maximum age says nothing about now.
func TestBadReadingAges(t *testing.T) {
	e := engine(t, plant(liquid))
	e.Advance(Beat{append(at(0, 2, 350, 330), marked(flow, 1, 0, quality.NoValue)...), through(90)}, nil)
	checkFigure(t, e, Stale, `tag "FT": last reading is older than its max_age of 60 s`)
}

// A gap that bad readings make is bridged like one without readings.
func TestBadReadingIsBridged(t *testing.T) {
	e := engine(t, bridging())
	e.Advance(Beat{append(at(0, 1, 350, 330), marked(inlet, 5, 0, quality.NoValue)...), through(50)}, nil)
	accounted(t, e, 5, 0, 0, 45)
	e.Advance(Beat{at(60, 1, 350, 330), through(61)}, nil)
	near(t, "bridged", accounted(t, e, 6, 55, 0, 0).BridgedGiven, 80e3*55, 1e-6)
}

// Uncertain readings are used, and their time is told; the first of the worst is named.
func TestUncertainTimeIsTold(t *testing.T) {
	e := engine(t, plant(liquid))
	e.Advance(Beat{at(0, 2, 350, 330), through(10)}, nil)
	e.Advance(Beat{marked(outlet, 10, 330, quality.OffSpec), through(20)}, nil)
	e.Advance(Beat{marked(inlet, 20, 350, quality.Maintenance), through(30)}, nil)
	f := e.Snapshot().Loads[0].Figure
	if f.Mark != quality.OffSpec || f.By != "TO" || f.Quality() != quality.Uncertain {
		t.Errorf("mark %v by %q, quality %v", f.Mark, f.By, f.Quality())
	}
	if got, want := f.Doubt(), `tag "TO" is uncertain: out-of-specification`; got != want {
		t.Errorf("doubt %q, want %q", got, want)
	}
	closed := e.Advance(Beat{marked(outlet, 30, 330, quality.None), through(60)}, nil)
	l := accounted(t, e, 60, 0, 0, 0)
	near(t, "given", l.Given, 160e3*60, 1e-6)
	if len(closed) != 1 || closed[0].Uncertain != 20*second || l.Uncertain != 20*second {
		t.Errorf("minutes %+v, %d ns uncertain in all; want 20 s", closed, l.Uncertain)
	}
	if f := l.Figure; f.Mark != quality.Maintenance || f.By != "TI" || f.Quality() != quality.Good {
		t.Errorf("mark %v by %q, quality %v", f.Mark, f.By, f.Quality())
	}
}

// An idle stream is told from its flow alone: marks of the temperatures are not its.
func TestIdleIsAsSureAsItsFlow(t *testing.T) {
	e := engine(t, plant(liquid))
	e.Advance(Beat{append(at(0, 0, 350, 330), marked(inlet, 10, 350, quality.Failed)...), through(20)}, nil)
	e.Advance(Beat{marked(flow, 20, 0, quality.Substitute), through(30)}, nil)
	if l := accounted(t, e, 30, 0, 0, 0); l.Uncertain != 10*second {
		t.Errorf("%d ns uncertain, want those of the flow: 10 s", l.Uncertain)
	}
}

// What leaves a hold was told by an uncertain reading when it came in, and a bad inlet
// empties the hold as a missing one does.
func TestMarkGoesThroughTheHold(t *testing.T) {
	e := engine(t, piped(0.04)) // 20 s at 2 l/s
	for s := 0.0; s < 60; s++ {
		m := quality.None
		if s >= 30 && s < 35 {
			m = quality.OffSpec
		}
		e.Advance(Beat{append(at(s, 2e-3, 350, 330)[:1], append(marked(inlet, s, 350, m), marked(outlet, s, 330, quality.None)...)...), through(s)}, nil)
		f := e.Snapshot().Loads[0].Figure
		now := s - 1 // the newest figure's
		came := now >= 30 && now < 35
		left := now >= 49 && now < 56 // parcels are a second long, and the one that leaves may lie in two
		if want := came || left; s > 25 && (f.Mark == quality.OffSpec) != want && now != 49 && now != 50 && now != 55 {
			t.Errorf("%g s: mark %v, want one: %v", now, f.Mark, want)
		}
	}
	e.Advance(Beat{append(at(60, 2e-3, 350, 330), marked(inlet, 61, 350, quality.Failed)...), through(63)}, nil)
	e.Advance(Beat{at(63, 2e-3, 350, 330), through(70)}, nil)
	if f := e.Snapshot().Loads[0].Figure; f.Fault != Fitting {
		t.Errorf("fault %v after a bad inlet, want the hold filling", f.Fault)
	}
}

// A rate is as sure as the readings that it is fitted to, and a bad one is none of them.
func TestMarkOfARate(t *testing.T) {
	cfg := plant(liquid)
	v := tank()
	v.Temperature, v.Content, v.Over = FromTag(inlet), Constant(100), minute
	cfg.Loads = []Load{{Name: "tank", Vessel: &v}}
	e := engine(t, cfg)
	for s := 0.0; s <= 200; s += 5 {
		value, m := 300+0.1*s, quality.None
		switch s {
		case 80:
			m = quality.Inaccurate
		case 160:
			value, m = math.NaN(), quality.NoValue
		}
		e.Advance(Beat{marked(inlet, s, value, m), through(s + 1)}, nil)
		f := e.Snapshot().Loads[0].Figure
		if s == 160 {
			if f.Fault != BadReading {
				t.Errorf("fault %v at a bad reading", f.Fault)
			}
			continue
		}
		if s < 75 {
			continue
		}
		if want := s >= 80 && s < 140; (f.Mark == quality.Inaccurate) != want || !f.Measured() {
			t.Errorf("%g s: fault %v, mark %v, want one: %v", s, f.Fault, f.Mark, want)
		}
		near(t, "rate", math.Abs(f.Rate), 0.1, 1e-9)
	}
}

// A liveness tag that is bad does not tell that the source lives.
func TestBadSignOfLife(t *testing.T) {
	e := engine(t, exceptional(lifespan*second))
	e.Advance(Beat{append(at(0, 2, 350, 330), sign(0, 1)), through(5)}, nil)
	checkFigure(t, e, NoFault, "")
	e.Advance(Beat{marked(alive, 5, math.NaN(), quality.Offline), through(7)}, nil)
	checkFigure(t, e, Stale, `tag "PLC" says that the source of "FT" has gone`)
}

// A count that was not read leaves it to the next what has passed; of a register that has
// failed nothing is known until the one after.
func TestBadCount(t *testing.T) {
	for _, tt := range []struct {
		mark     quality.Mark
		measured int64
		given    float64
	}{
		{quality.NoValue, 60, 60 * 80e3},
		{quality.StaleAtSource, 60, 60 * 80e3},
		{quality.Failed, 20, 20 * 80e3},
		{quality.OutOfService, 20, 20 * 80e3},
	} {
		e := engine(t, countingPlant())
		e.Advance(Beat{append(counts(0, 100), temps(0, 350, 330)...), through(10)}, nil)
		e.Advance(Beat{marked(flow, 20, math.NaN(), tt.mark), through(40)}, nil)
		if f := e.Snapshot().Loads[0].Figure; tt.measured == 20 && (f.Fault != BadReading || f.By != "QT") {
			t.Errorf("%v: fault %v by %q", tt.mark, f.Fault, f.By)
		}
		e.Advance(Beat{append(counts(40, 140), temps(40, 350, 330)...), through(50)}, nil)
		e.Advance(Beat{counts(60, 160), through(60)}, nil)
		e.Advance(Beat{counts(61, 161), through(61)}, nil)
		l := e.Snapshot().Loads[0]
		if l.Measured/second != tt.measured && l.Measured/second != tt.measured+1 {
			t.Errorf("%v: %d s measured, want %d", tt.mark, l.Measured/second, tt.measured)
		}
		near(t, tt.mark.String()+": given", l.Given, tt.given+80e3*float64(l.Measured/second-tt.measured), 1e-6)
	}
}

// A count told by an uncertain reading makes all the time that it decides on uncertain, and
// so does the next, which is the difference from it.
func TestUncertainCount(t *testing.T) {
	e := engine(t, countingPlant())
	e.Advance(Beat{append(counts(0, 100), temps(0, 350, 330)...), through(20)}, nil)
	e.Advance(Beat{marked(flow, 20, 120, quality.Substitute), through(30)}, nil)
	if f := e.Snapshot().Loads[0].Figure; f.Mark != quality.Substitute || f.By != "QT" {
		t.Errorf("mark %v by %q", f.Mark, f.By)
	}
	e.Advance(Beat{append(counts(40, 140), temps(40, 350, 330)...), through(50)}, nil)
	e.Advance(Beat{counts(60, 160), through(61)}, nil)
	if l := accounted(t, e, 60, 0, 0, 1); l.Uncertain != 40*second {
		t.Errorf("%d ns uncertain, want 40 s", l.Uncertain)
	}
}

// A register that reports on change stands for as long as its silence would, once it was not
// read: what its source's signs of life tell is not that it has a value.
func TestBadCountOfALivingSource(t *testing.T) {
	cfg := countingPlant()
	cfg.Tags[flow].OnChange, cfg.Tags[flow].Alive = true, alive
	cfg.Tags = append(cfg.Tags, Tag{Name: "PLC", MaxAge: lifespan * second})
	e := engine(t, cfg)
	for s := 0.0; s <= hours; s += 10 {
		all := append(beating(s, s), temps(s, 350, 330)...)
		switch s {
		case 0, 10:
			all = append(all, counts(s, 100+s)...)
		case 20:
			all = append(all, marked(flow, s, 0, quality.NoValue)...)
		}
		e.Advance(Beat{all, through(s)}, nil)
		if l := e.Snapshot().Loads[0]; l.Undecided > cfg.Tags[flow].MaxAge {
			t.Fatalf("%g s: %d s are undecided", s, l.Undecided/second)
		}
	}
	accounted(t, e, 10, 0, int64(hours)-10, 0)
	checkFigure(t, e, BadReading, `tag "QT" is bad: no-value`)
}
