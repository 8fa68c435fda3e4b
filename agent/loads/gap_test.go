package loads

import (
	"math"
	"testing"
)

// bridging is the plant with a bridge of two minutes and readings held for 10 s.
func bridging() Config {
	cfg := plant(liquid)
	cfg.Bridge = 2 * minute
	for i := range cfg.Tags {
		cfg.Tags[i].MaxAge = 10 * second
	}
	return cfg
}

// accounted asserts the times of the load, in s, and that they leave nothing out.
func accounted(t *testing.T, e *Engine, measured, bridged, missing, undecided int64) LoadState {
	t.Helper()
	l := e.Snapshot().Loads[0]
	if got, want := [...]int64{l.Measured, l.Bridged, l.Missing, l.Undecided}, [...]int64{measured * second, bridged * second, missing * second, undecided * second}; got != want {
		t.Errorf("measured, bridged, missing and undecided are %d ns, want %d", got, want)
	}
	return l
}

// From 80 kW at 0 s, held to 10 s, to 240 kW at 90 s. The last duty is that of the grid
// point 9 s, so the line rises by 160 kW in 81 s, and its sum over the grid points 10 to
// 89 s is 80·80 + 160/81·(1+…+80) = 12800 kJ (arithmetic).
func TestGapIsBridgedByALine(t *testing.T) {
	e := engine(t, bridging())
	closed := e.Advance(Beat{at(0, 1, 350, 330), through(89)}, nil)
	l := accounted(t, e, 10, 0, 0, 79)
	near(t, "bridged before data come back", l.BridgedGiven, 0, 0)
	if len(closed) != 0 {
		t.Errorf("%d minutes closed in a gap, want none", len(closed))
	}
	closed = e.Advance(Beat{at(90, 3, 350, 330), through(91)}, nil)
	l = accounted(t, e, 11, 80, 0, 0)
	near(t, "bridged", l.BridgedGiven, 12800e3, 1e-6)
	near(t, "given", l.Given, 80e3*10+240e3, 1e-6)
	near(t, "coverage of 15 min", l.Means[1].Coverage, 11.0/(59*15+1), 1e-12) // 59 parts of 15 s and a second
	if len(closed) != 1 || closed[0].Measured != 10*second || closed[0].Bridged != 50*second || closed[0].Missing != 0 {
		t.Fatalf("minutes %+v, want the first with 10 s measured and 50 s bridged", closed)
	}
	near(t, "bridged in the first minute", closed[0].BridgedGiven, 80e3*50+160e3/81*50*51/2, 1e-6)
	near(t, "mean duty of what was measured", closed[0].Duty, 80e3, 1e-9)
}

// A line from +80 kW to −80 kW gives and takes alike; a load that takes heat has them
// the other way round.
func TestBridgeAcrossZero(t *testing.T) {
	for _, gives := range []bool{true, false} {
		cfg := bridging()
		cfg.Loads[0].Stream.Gives = gives
		e := engine(t, cfg)
		e.Advance(Beat{at(0, 1, 350, 330), through(0)}, nil)
		e.Advance(Beat{at(110, 1, 330, 350), through(111)}, nil)
		l := accounted(t, e, 11, 100, 0, 0)
		var want float64 // Σ of the positive part over the points 10 to 109 s, seen from 9 s
		for k := 1; k <= 50; k++ {
			want += 80e3 * (1 - 2*float64(k)/101)
		}
		near(t, "bridged given", l.BridgedGiven, want, 1e-6)
		near(t, "bridged taken", l.BridgedTaken, want, 1e-6)
	}
}

// A gap of just the bridge is filled, and one a grid step longer is missing, whether
// event time comes in one step or in many.
func TestLongestBridge(t *testing.T) {
	for _, step := range []float64{1, 7, 1000} {
		for _, tt := range []struct {
			back             float64
			bridged, missing int64
		}{{130, 120, 0}, {131, 0, 121}} {
			e := engine(t, bridging())
			e.Advance(Beat{at(0, 1, 350, 330), through(0)}, nil)
			for s := step; s < tt.back; s += step {
				e.Advance(Beat{nil, through(s)}, nil)
			}
			e.Advance(Beat{at(tt.back, 1, 350, 330), through(tt.back + 5)}, nil)
			l := accounted(t, e, 15, tt.bridged, tt.missing, 0)
			near(t, "bridged", l.BridgedGiven, 80e3*float64(tt.bridged), 1e-6)
		}
	}
}

// What is known to be wrong is no want of data: a gap that ends in such a fault, or
// begins after one, is missing.
func TestOnlyWantOfDataIsBridged(t *testing.T) {
	boiling, reverse := at(60, 1, 419, 330), at(60, -1, 350, 330)
	for _, fault := range [][]Reading{boiling, reverse} {
		e := engine(t, bridging())
		e.Advance(Beat{at(0, 1, 350, 330), through(60)}, nil)
		e.Advance(Beat{fault, through(69)}, nil)
		accounted(t, e, 10, 0, 59, 0)
		e.Advance(Beat{at(100, 1, 350, 330), through(101)}, nil)
		accounted(t, e, 11, 0, 90, 0)
	}
}

func TestNothingIsBridgedAtTheBeginning(t *testing.T) {
	e := engine(t, bridging())
	e.Advance(Beat{at(0, 1, 350, 330)[:1], through(5)}, nil)
	e.Advance(Beat{at(6, 1, 350, 330), through(7)}, nil)
	accounted(t, e, 1, 0, 6, 0)
}

// A minute that holds bridged time alone has a record, and says that nothing was measured.
func TestBridgedMinuteHasARecord(t *testing.T) {
	e := engine(t, bridging())
	e.Advance(Beat{at(50, 1, 350, 330), through(60)}, nil)
	closed := e.Advance(Beat{at(125, 1, 350, 330), through(180)}, nil)
	if len(closed) != 1 {
		t.Fatalf("%d minutes, want 1", len(closed))
	}
	m := closed[0]
	if m.Bridged != minute || m.Measured != 0 || m.Duty != 0 || m.DutyMin != 0 || m.DutyMax != 0 {
		t.Errorf("minute of the gap: %+v", m)
	}
	near(t, "bridged", m.BridgedGiven, 80e3*60, 1e-6)
}

func TestAdoptDropsAnOpenGap(t *testing.T) {
	e := engine(t, bridging())
	e.Advance(Beat{at(0, 1, 350, 330), through(40)}, nil)
	e.Adopt(Beat{at(50, 1, 350, 330), through(55)})
	e.Advance(Beat{nil, through(57)}, nil)
	l := accounted(t, e, 12, 0, 0, 0)
	near(t, "bridged", l.BridgedGiven, 0, 0)
}

// The registers never fall, and the times add up at every step, with a duty that
// swings and data that come and go.
func TestRegistersOnlyRiseAcrossGaps(t *testing.T) {
	e := engine(t, bridging())
	var last LoadState
	for s := range 3000 {
		var rr []Reading
		if s%7 == 0 && s/100%3 != 1 {
			rr = at(float64(s), 1, 340+20*math.Sin(float64(s)/90), 340)
		}
		e.Advance(Beat{rr, through(float64(s))}, nil)
		l := e.Snapshot().Loads[0]
		if l.Given < last.Given || l.Taken < last.Taken || l.BridgedGiven < last.BridgedGiven || l.BridgedTaken < last.BridgedTaken {
			t.Fatalf("at %d s a register fell: %+v after %+v", s, l.Totals, last.Totals)
		}
		if sum := l.Measured + l.Bridged + l.Missing + l.Undecided; sum != int64(s)*second {
			t.Fatalf("at %d s the times add up to %d ns", s, sum)
		}
		last = l
	}
	if last.BridgedGiven == 0 || last.BridgedTaken == 0 || last.Missing != 0 {
		t.Errorf("totals %+v: want bridges of both signs and nothing missing", last.Totals)
	}
}
