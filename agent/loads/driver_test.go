package loads

import (
	"math"
	"testing"

	"heatreeve/ingest/quality"
)

const (
	outdoor = 3 + iota
	rate
)

// drivenPlant is the plant with two drivers that hold for 20 s.
func drivenPlant(cfg Config) Config {
	cfg.Tags = append(cfg.Tags, Tag{Name: "OT", MaxAge: 20 * second}, Tag{Name: "PR", MaxAge: 20 * second})
	cfg.Loads[0].Drivers = []Source{FromTag(outdoor), FromTag(rate)}
	return cfg
}

func drive(s float64, tag int, x float64) Reading {
	return Reading{Tag: tag, At: epoch + int64(s*1e9), Value: x}
}

// The outdoor temperature is 270 K for 30 s and 280 K for 20 s until it is too old: its mean
// over the 50 s is (270·30 + 280·20)/50 = 274 K. The rate of production has told nothing.
func TestDriversOfAMinute(t *testing.T) {
	e := engine(t, drivenPlant(plant(liquid)))
	closed := e.Advance(Beat{append(at(0, 2, 350, 330), drive(0, outdoor, 270), drive(15, outdoor, 270), drive(30, outdoor, 280)), through(60)}, nil)
	if len(closed) != 1 || closed[0].Measured != minute {
		t.Fatalf("minutes %+v, want one measured throughout", closed)
	}
	near(t, "outdoor temperature", closed[0].Drivers[0], 274, 1e-9)
	if d := closed[0].Drivers; !math.IsNaN(d[1]) || d[2] != 0 || d[3] != 0 {
		t.Errorf("drivers %v, want none of the second, and 0 beyond", d)
	}
	f := e.Snapshot().Loads[0].Figure
	if !f.Measured() || !math.IsNaN(f.Drivers[0]) {
		t.Errorf("figure with fault %v and drivers %v, want a duty without a driver", f.Fault, f.Drivers)
	}
}

// A driver counts in the measured time alone, idle or not: 270 K in 20 s with a flow and
// 290 K in 20 s without; the 300 K of the time without a figure do not.
func TestDriversOverTheMeasuredTime(t *testing.T) {
	cfg := drivenPlant(plant(liquid))
	cfg.Tags[flow].MaxAge = 20 * second
	e := engine(t, cfg)
	closed := e.Advance(Beat{append(at(0, 2, 350, 330), drive(0, outdoor, 270), at(20, 0, 350, 330)[0], drive(20, outdoor, 290), drive(40, outdoor, 300)), through(60)}, nil)
	if len(closed) != 1 || closed[0].Measured != 40*second {
		t.Fatalf("minutes %+v, want one of 40 s", closed)
	}
	near(t, "outdoor temperature", closed[0].Drivers[0], 280, 1e-9)
}

// A bad reading of a driver is none, and blinds nothing.
func TestBadDriver(t *testing.T) {
	e := engine(t, drivenPlant(plant(liquid)))
	bad := drive(10, outdoor, 999)
	bad.Mark = quality.Failed
	closed := e.Advance(Beat{append(at(0, 2, 350, 330), drive(0, outdoor, 270), bad), through(60)}, nil)
	if len(closed) != 1 || closed[0].Measured != minute {
		t.Fatalf("minutes %+v, want one measured throughout", closed)
	}
	near(t, "outdoor temperature", closed[0].Drivers[0], 270, 1e-9)
}

// Where a count decides on the time before it, drivers wait with the duty; also where
// nothing has flowed.
func TestDriversOfACountedFlow(t *testing.T) {
	for _, kg := range []float64{60, 0} {
		e := engine(t, drivenPlant(countingPlant()))
		e.Advance(Beat{append(counts(0, 100), temps(0, 350, 330)...), through(10)}, nil)
		e.Advance(Beat{[]Reading{drive(10, outdoor, 270), drive(30, outdoor, 280)}, through(50)}, nil)
		closed := e.Advance(Beat{counts(60, 100+kg), through(61)}, nil)
		if len(closed) != 1 || closed[0].Measured != minute {
			t.Fatalf("%g kg: minutes %+v, want one measured throughout", kg, closed)
		}
		near(t, "outdoor temperature", closed[0].Drivers[0], 275, 1e-9)
	}
}

// A state goes on with the sums of its drivers, but not where others, or more, drive the
// load, or the numbers mean something else.
func TestDriversAfterARestart(t *testing.T) {
	cfg := drivenPlant(plant(liquid))
	for _, tt := range []struct {
		name   string
		change func(*Config)
		want   float64
	}{
		{"the same", func(*Config) {}, 275},
		{"other", func(c *Config) { c.Loads[0].Drivers = []Source{FromTag(rate), FromTag(outdoor)} }, 0.5},
		{"other numbers", func(c *Config) { c.Tags[outdoor].Meaning = "°F" }, 280},
	} {
		e := engine(t, cfg)
		e.Advance(Beat{append(at(0, 2, 350, 330), drive(0, outdoor, 270), drive(15, outdoor, 270)), through(30)}, nil)
		other := drivenPlant(plant(liquid))
		tt.change(&other)
		next := resumed(t, e, other)
		closed := next.Advance(Beat{[]Reading{drive(30, outdoor, 280), drive(30, rate, 0.5), drive(45, outdoor, 280), drive(45, rate, 0.5)}, through(60)}, nil)
		if len(closed) != 1 {
			t.Fatalf("%s: minutes %+v, want one", tt.name, closed)
		}
		near(t, tt.name, closed[0].Drivers[0], tt.want, 1e-9)
	}
}

// What drives a load changes no bit of what it is accounted for.
func TestDriversChangeNoRegister(t *testing.T) {
	for _, cfg := range []func() Config{func() Config { return plant(liquid) }, countingPlant, bridging} {
		plain, with := engine(t, cfg()), engine(t, drivenPlant(cfg()))
		var all []Reading
		for s := range 300 {
			x := float64(s)
			if s%100 < 90 {
				all = append(all, at(x, 1+x/7, 350+math.Sin(x), 330)...)
			}
		}
		plain.Advance(Beat{all, through(310)}, nil)
		var driven []Reading
		for s := range 300 {
			driven = append(driven, drive(float64(s)+0.5, outdoor+s%2, float64(s)))
		}
		with.Advance(Beat{append(driven, all...), through(310)}, nil)
		a, b := fingerprint(plain), fingerprint(with)
		for i := range a {
			if a[i] != b[i] {
				t.Errorf("number %d is %x without drivers and %x with them", i, a[i], b[i])
			}
		}
	}
}

func TestDriversThatCannotBe(t *testing.T) {
	for name, drivers := range map[string][]Source{
		"a counter": {FromTag(flow)}, "too many": {FromTag(1), FromTag(1), FromTag(1), FromTag(1), FromTag(1)}, "no such tag": {FromTag(9)}, "a constant": {Constant(1)},
	} {
		cfg := countingPlant()
		cfg.Loads[0].Drivers = drivers
		if _, err := New(cfg); err == nil {
			t.Errorf("%s is taken, want an error", name)
		}
	}
}
