package loads

import (
	"math"
	"strings"
	"testing"
)

// Differences of registers; the roll-overs are worked by hand (100000 − 99987.3 + 14.2,
// and 2³² − 4294960000 + 1500).
func TestRise(t *testing.T) {
	for _, tt := range []struct {
		name         string
		c            Counter
		from, to     float64
		step, amount float64 // the largest rate is 10 a second, for 10 s
		want         difference
	}{
		{"plain", Counter{}, 10, 12.5, 0, 2.5, risen},
		{"nothing", Counter{}, 10, 10, 0, 0, risen},
		{"five digits and a tenth", Counter{Modulus: 1e5}, 99987.3, 14.2, 0, 26.9, risen},
		{"32 bits in steps of 10,000", Counter{Modulus: 1 << 32}, 4294960000, 1500, 1e4, 8796, risen},
		{"a small fall is no roll-over", Counter{Modulus: 1e5}, 500, 400, 0, 0, reset},
		{"nor one from below half", Counter{Modulus: 1e5}, 49999, 0, 0, 0, reset},
		{"a fall without a modulus", Counter{}, 99987.3, 14.2, 0, 0, reset},
		{"at the largest rate and a tenth", Counter{}, 0, 110, 0, 110, risen},
		{"above it", Counter{}, 0, 110.1, 0, 0, implausible},
		{"above it by less than a step", Counter{}, 0, 110.1, 0.2, 110.1, risen},
		{"a roll-over above it", Counter{Modulus: 1e5}, 99000, 200, 0, 0, implausible},
		{"no number", Counter{}, 0, math.NaN(), 0, 0, implausible},
	} {
		amount, d := tt.c.rise(tt.from, tt.to, tt.step, 10, 10*second)
		if d != tt.want || math.Abs(amount-tt.amount) > 1e-8 {
			t.Errorf("%s: %g, %d; want %g, %d", tt.name, amount, d, tt.amount, tt.want)
		}
	}
}

// counting is the plant with a counter of kg for its flow; counts hold for five minutes,
// temperatures for one.
func countingPlant() Config {
	cfg := plant(liquid)
	cfg.Tags[flow] = Tag{Name: "QT", MaxAge: 5 * minute, Counter: &Counter{Modulus: 1000, Largest: 10}}
	return cfg
}

func counts(s, kg float64) []Reading { return at(s, kg, 0, 0)[:1] }
func temps(s, ti, to float64) []Reading {
	return at(s, 0, ti, to)[1:]
}

// 60 kg in 40 s are 1.5 kg/s, over a difference of 20 K for 20 s and of 10 K for 20 s:
// 60 kg/40 s·4 kJ/(kg K)·(20 K·20 s + 10 K·20 s) = 3600 kJ. Until the second count comes
// nothing is decided.
func TestCountIsSpreadOverItsTime(t *testing.T) {
	e := engine(t, countingPlant())
	e.Advance(Beat{append(counts(0, 100), temps(0, 350, 330)...), through(20)}, nil)
	e.Advance(Beat{temps(20, 340, 330), through(40)}, nil)
	accounted(t, e, 0, 0, 0, 40)
	f := e.Snapshot().Loads[0].Figure
	if f.Fault != NoReading || !strings.Contains(f.Reason, `"QT" has told one count`) {
		t.Errorf("fault %v, reason %q", f.Fault, f.Reason)
	}
	e.Advance(Beat{counts(40, 160), through(41)}, nil)
	l := accounted(t, e, 40, 0, 0, 1)
	near(t, "given", l.Given, 3600e3, 1e-6)
	near(t, "live duty", l.Figure.Duty, 1.5*4000*10, 1e-6)
	near(t, "live flow", l.Figure.MassFlow, 1.5, 1e-12)
}

// Three counts within two minutes: 1 kg/s for 30 s, nothing for 50 s, 2 kg/s for 40 s.
func TestMinutesOfACountedFlow(t *testing.T) {
	e := engine(t, countingPlant())
	var closed []Minute
	for s := 0.0; s <= 130; s += 10 {
		rr := temps(s, 350, 330)
		if kg, ok := map[float64]float64{0: 0, 30: 30, 80: 30, 120: 110}[s]; ok {
			rr = append(rr, counts(s, kg)...)
		}
		closed = e.Advance(Beat{rr, through(s)}, closed)
	}
	if len(closed) != 2 {
		t.Fatalf("%d minutes, want 2", len(closed))
	}
	m, n := closed[0], closed[1]
	if m.Measured != minute || m.Idle != 30*second || n.Measured != minute || n.Idle != 20*second {
		t.Errorf("measured %d and %d, idle %d and %d", m.Measured, n.Measured, m.Idle, n.Idle)
	}
	near(t, "given in the first", m.Given, 80e3*30, 1e-6)
	near(t, "given in the second", n.Given, 160e3*40, 1e-6)
	near(t, "mean duty", m.Duty, 40e3, 1e-9)
	near(t, "least duty", m.DutyMin, 0, 0)
	near(t, "greatest duty", n.DutyMax, 160e3, 1e-9)
	near(t, "mean flow", n.MassFlow, 80.0/60, 1e-12)
	near(t, "inlet while flowing", n.Inlet, 350, 1e-9)
	near(t, "coverage", e.Snapshot().Loads[0].Means[0].Coverage, 1, 0.02)
}

// A register that stands still needs no temperatures; one that moves does.
func TestStandingRegisterNeedsNoTemperatures(t *testing.T) {
	for _, tt := range []struct {
		kg                      float64
		measured, missing, idle int64
	}{{100, 240, 0, 240}, {148, 60, 180, 0}} {
		e := engine(t, countingPlant())
		e.Advance(Beat{append(counts(0, 100), temps(0, 350, 330)...), through(239)}, nil)
		closed := e.Advance(Beat{counts(240, tt.kg), through(240)}, nil)
		closed = e.Advance(Beat{append(counts(250, tt.kg), temps(245, 350, 330)...), through(251)}, closed)
		l := accounted(t, e, tt.measured+10, 0, tt.missing, 1)
		near(t, "given", l.Given, (tt.kg-100)/240*80e3*60, 1e-6)
		var idle int64
		for _, m := range closed {
			idle += m.Idle
		}
		if idle != tt.idle*second {
			t.Errorf("idle %d s, want %d", idle/second, tt.idle)
		}
		if !l.Figure.Idle {
			t.Errorf("figure after two equal counts: %+v, want idle", l.Figure)
		}
	}
}

// Without a count for its maximum age the time is missing, what waited included, and the
// next count starts anew.
func TestCountThatComesTooLate(t *testing.T) {
	e := engine(t, countingPlant())
	var closed []Minute
	for s := 0.0; s <= 460; s += 20 {
		rr := temps(s, 350, 330)
		if s == 0 || s == 400 || s == 440 {
			rr = append(rr, counts(s, s/10)...)
		}
		closed = e.Advance(Beat{rr, through(s)}, closed)
		if s == 300 {
			accounted(t, e, 0, 0, 0, 300)
		}
		if s == 320 {
			accounted(t, e, 0, 0, 320, 0)
		}
	}
	l := accounted(t, e, 40, 0, 400, 20)
	near(t, "given", l.Given, 4*80e3, 1e-6)
	if len(closed) != 1 || closed[0].Start != through(360) {
		t.Errorf("minutes %+v, want that which begins at 360 s", closed)
	}
}

func TestRollOverResetAndNonsense(t *testing.T) {
	e := engine(t, countingPlant())
	for i, kg := range []float64{970, 990, 10, 4, 24, 600, 620} {
		s := float64(20 * i)
		e.Advance(Beat{append(counts(s, kg), temps(s, 350, 330)...), through(s + 1)}, nil)
		f := e.Snapshot().Loads[0].Figure
		if i == 3 && (f.Fault != NoReading || !strings.Contains(f.Reason, "fell from 10 to 4")) {
			t.Errorf("after a reset: fault %v, reason %q", f.Fault, f.Reason)
		}
	}
	l := accounted(t, e, 80, 0, 40, 1)
	near(t, "given", l.Given, 4*20*80e3, 1e-6)
	if got, want := e.Snapshot().Tags[flow].Tally, (Tally{Reset: 1, Implausible: 1}); got != want {
		t.Errorf("tally %+v, want %+v", got, want)
	}
}

// What no plant has is refused where the site gives no largest rate, and spoils nothing.
func TestAbsurdCount(t *testing.T) {
	cfg := countingPlant()
	cfg.Tags[flow].Counter = &Counter{}
	e := engine(t, cfg)
	for i, kg := range []float64{0, 20, math.MaxFloat64, 40, 60} {
		s := float64(20 * i)
		e.Advance(Beat{append(counts(s, kg), temps(s, 350, 330)...), through(s + 1)}, nil)
	}
	l := accounted(t, e, 40, 0, 40, 1)
	near(t, "given", l.Given, 2*20*80e3, 1e-6)
}

// Pulses of 10 kg at a steady 0.8 kg/s: each comes after 12 or 13 s, and the heat of any
// time is within two pulses of what flowed.
func TestPulses(t *testing.T) {
	cfg := countingPlant()
	cfg.Tags[flow].Resolution = 10
	e := engine(t, cfg)
	for s := range 3000 {
		rr := temps(float64(s), 350, 330)
		rr = append(rr, counts(float64(s), math.Mod(10*math.Floor(0.08*float64(s)+1e-9), 1000))...)
		e.Advance(Beat{rr, through(float64(s))}, nil)
		l := e.Snapshot().Loads[0]
		near(t, "given", l.Given/80e3, 0.8*float64(s), 20)
		if t.Failed() {
			break
		}
	}
	if y := e.Snapshot().Tags[flow].Tally; y.Implausible != 0 || y.Reset != 0 {
		t.Errorf("tally %+v: a pulse is no nonsense at a fine grid", y)
	}
}

// A step of 6 kg of the register blurs each count by 6 kg/√6, and with it the heat: by
// 4 kJ/(kg K)·20 K for each kilogram.
func TestResolutionBlursTheHeat(t *testing.T) {
	cfg := countingPlant()
	cfg.Tags[flow].Resolution = 6
	e := engine(t, cfg)
	var closed []Minute
	for s := 0.0; s <= 120; s += 20 {
		closed = e.Advance(Beat{append(counts(s, 2*s), temps(s, 350, 330)...), through(s + 1)}, closed)
	}
	blur := 80e3 * 6 / math.Sqrt(6)
	near(t, "variance of a minute with three counts", closed[0].Random, 3*blur*blur, 1e-3)
}

// The count may come in a minute that has no record, since nothing of it was measured: the
// blur is then in the minute before, so that none is lost.
func TestBlurOfACountInAMissingMinute(t *testing.T) {
	cfg := countingPlant()
	cfg.Tags[flow].Resolution = 6
	for i := range cfg.Tags[1:] {
		cfg.Tags[1+i].MaxAge = minute
	}
	e := engine(t, cfg)
	e.Advance(Beat{append(counts(0, 0), temps(0, 350, 330)...), through(1)}, nil)
	closed := e.Advance(Beat{counts(90, 90), through(121)}, nil)
	if len(closed) != 1 {
		t.Fatalf("minutes %+v, want one", closed)
	}
	blur := 80e3 * 60 / 90 * 6 / math.Sqrt(6)
	near(t, "variance", closed[0].Random, blur*blur, 1e-3)
}

// Temperatures that stop for 80 s while the counter tells 1 kg/s, then 3 kg/s: the line
// is of the heat of a kilogram, from 80 to 160 kJ, and the flow is the counter's.
func TestBridgeOfACountedFlow(t *testing.T) {
	cfg := countingPlant()
	cfg.Bridge = 2 * minute
	cfg.Tags[inlet].MaxAge, cfg.Tags[outlet].MaxAge = 10*second, 10*second
	e := engine(t, cfg)
	e.Advance(Beat{append(counts(0, 0), temps(0, 350, 330)...), through(39)}, nil)
	e.Advance(Beat{counts(40, 40), through(79)}, nil)
	l := accounted(t, e, 10, 0, 0, 69)
	near(t, "given before data come back", l.Given, 80e3*10, 1e-6)
	e.Advance(Beat{temps(90, 370, 330), through(92)}, nil)
	line := func(from, to int) (sum float64) {
		for k := from; k < to; k++ {
			sum += 80e3 + 80e3*float64(k-9)/81
		}
		return sum
	}
	l = accounted(t, e, 10, 30, 0, 52)
	near(t, "bridged to the known count", l.BridgedGiven, line(10, 40), 1e-6)
	e.Advance(Beat{counts(95, 40+3*55), through(96)}, nil)
	l = accounted(t, e, 15, 80, 0, 1)
	near(t, "bridged", l.BridgedGiven, line(10, 40)+3*line(40, 90), 1e-6)
	near(t, "given", l.Given, 80e3*10+3*160e3*5, 1e-6)
}

// A source that reports by exception and is alive tells by its silence that nothing has
// passed: the next count is spread over no more than the maximum age.
func TestCounterThatReportsByException(t *testing.T) {
	cfg := countingPlant()
	cfg.Tags[flow].OnChange, cfg.Tags[flow].Alive = true, 3
	cfg.Tags[flow].MaxAge = minute
	cfg.Tags = append(cfg.Tags, Tag{Name: "ALIVE", MaxAge: 30 * second})
	e := engine(t, cfg)
	var closed []Minute
	for s := 0.0; s <= 300; s += 10 {
		rr := append(temps(s, 350, 330), Reading{Tag: 3, At: through(s), Value: 1})
		if s == 0 || s == 280 {
			rr = append(rr, counts(s, s)...)
		}
		closed = e.Advance(Beat{rr, through(s + 1)}, closed)
	}
	l := accounted(t, e, 280, 0, 0, 21)
	near(t, "given", l.Given, 280*80e3, 1e-6)
	if len(closed) != 4 || closed[3].Idle != minute {
		t.Errorf("minutes %+v, want four idle ones", closed)
	}
}

// The same where nothing else is heard, however event time comes: by 250 s five times 50
// s of silence have told that nothing passed, and what the count at 280 s tells is missing
// for want of temperatures.
func TestSilentCounterAmongSilentTags(t *testing.T) {
	for _, step := range []float64{1, 13, 1000} {
		cfg := countingPlant()
		cfg.Tags[flow].OnChange, cfg.Tags[flow].Alive = true, 3
		cfg.Tags[flow].MaxAge = 50 * second
		cfg.Tags = append(cfg.Tags, Tag{Name: "ALIVE", MaxAge: 10 * minute})
		e := engine(t, cfg)
		e.Advance(Beat{append(counts(0, 0), Reading{Tag: 3, At: through(0), Value: 1}), through(0)}, nil)
		for s := step; s < 280; s += step {
			e.Advance(Beat{nil, through(s)}, nil)
		}
		e.Advance(Beat{counts(280, 5), through(280)}, nil)
		e.Advance(Beat{nil, through(281)}, nil)
		accounted(t, e, 250, 0, 30, 1)
	}
}

func TestCountedLoadFromASavedState(t *testing.T) {
	cfg := countingPlant()
	e := engine(t, cfg)
	e.Advance(Beat{append(counts(0, 100), temps(0, 350, 330)...), through(30)}, nil)
	state, err := e.Save()
	if err != nil {
		t.Fatal(err)
	}
	again := engine(t, cfg)
	if err := again.Restore(state); err != nil {
		t.Fatal(err)
	}
	again.Advance(Beat{counts(40, 160), through(41)}, nil)
	l := accounted(t, again, 40, 0, 0, 1)
	near(t, "given", l.Given, 60*80e3, 1e-6)
}

func TestNewRefusesCounters(t *testing.T) {
	for _, tt := range []struct {
		change func(*Config)
		want   string
	}{
		{func(c *Config) { c.Tags[flow].Counter.Modulus = -1 }, "rolls over at -1"},
		{func(c *Config) { c.Tags[flow].Counter.Largest = math.Inf(1) }, "at most +Inf a second"},
		{func(c *Config) { c.Loads[0].HasWitness, c.Loads[0].Witness = true, FromTag(inlet) }, "no counter"},
		{func(c *Config) { c.Loads[0].HasWitness, c.Loads[0].Witness = true, Constant(1) }, "no counter"},
		{func(c *Config) { c.Loads[0].Stream.HasPump = true }, "flow is counted"},
		{func(c *Config) { c.Loads[0].Stream.Hold = 1 }, "flow is counted"},
	} {
		cfg := countingPlant()
		tt.change(&cfg)
		if _, err := New(cfg); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("error %v, want one with %q", err, tt.want)
		}
	}
}
