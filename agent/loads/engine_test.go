package loads

import (
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
)

func TestConstantDutyBooksDutyTimesTime(t *testing.T) {
	e := engine(t, plant(liquid))
	for s := 0.0; s <= 600; s += 10 {
		e.Advance(Beat{at(s, 2, 350, 330), through(s)}, nil)
	}
	l := e.Snapshot().Loads[0]
	near(t, "duty", l.Figure.Duty, 2*4000*20, 0)
	near(t, "given", l.Given, 160e3*600, 0)
	near(t, "taken", l.Taken, 0, 0)
	if l.Measured != 600*second || l.Missing != 0 {
		t.Errorf("measured %d ns, missing %d ns; want 600 s and 0", l.Measured, l.Missing)
	}
	for k, m := range l.Means {
		near(t, "mean duty", m.Duty, 160e3, 1e-6)
		want := math.Min(1, 600e9/float64(Windows[k]))
		near(t, "coverage", m.Coverage, want, 0.02) // the window moves in sixtieths
	}
}

// The register holds each figure over its interval, so a ramp of temperature
// read every second comes out as the left sum, half a step from the integral.
func TestRampAgainstClosedForm(t *testing.T) {
	for _, grid := range []int64{second, 5 * second, 20 * second} {
		cfg := plant(liquid)
		cfg.Grid = grid
		e := engine(t, cfg)
		for s := 0.0; s <= 1200; s++ {
			e.Advance(Beat{at(s, 3, 330+s/100, 330), through(s)}, nil)
		}
		n := float64(1200*second) / float64(grid)
		h := float64(grid) / 1e9
		want := 3 * 4000 * (h / 100) * h * n * (n - 1) / 2 // Σ q·cp·k·h/100·h
		near(t, "given", e.Snapshot().Loads[0].Given, want, 1e-9*want)
		integral := 3.0 * 4000 * 1200 * 1200 / 200
		near(t, "distance to the integral", integral-want, 3*4000*12*h/2, 1)
	}
}

// The product is integrated, not the product of means: flows 1, 2, 3, 2 kg/s and
// differences 30, 20, 10, 20 K give 35, where the means give 40 (closed form).
func TestProductOfMeansIsNotTaken(t *testing.T) {
	e := engine(t, plant(liquid))
	for i, q := range []float64{1, 2, 3, 2} {
		d := []float64{30, 20, 10, 20}[i]
		e.Advance(Beat{at(float64(i), q, 330+d, 330), through(float64(i))}, nil)
	}
	e.Advance(Beat{nil, through(4)}, nil)
	near(t, "mean of q·Δ", e.Snapshot().Loads[0].Given/4000/4, 35, 1e-12)
}

// Irregular readings held: 100, 120, 90, 150, 150 kW from 0, 10, 25, 40, 70 s to
// 90 s are 11,650 kJ (arithmetic: 1000+1800+1350+4500+3000). Held for at most 20
// s, the ten seconds from 60 to 70 s are missing and their 1,500 kJ with them.
func TestHoldAndMaximumAge(t *testing.T) {
	for _, tt := range []struct {
		age               int64
		heat              float64
		measured, missing int64
	}{
		{minute, 11650e3, 90 * second, 0},
		{20 * second, 10150e3, 80 * second, 10 * second},
	} {
		cfg := plant(liquid)
		for i := range cfg.Tags {
			cfg.Tags[i].MaxAge = tt.age
		}
		e := engine(t, cfg)
		for i, s := range []float64{0, 10, 25, 40, 70} {
			kW := []float64{100, 120, 90, 150, 150}[i]
			e.Advance(Beat{at(s, kW*1e3/4000/20, 350, 330), through(s)}, nil)
		}
		e.Advance(Beat{nil, through(90)}, nil)
		l := e.Snapshot().Loads[0]
		near(t, "heat", l.Given, tt.heat, 1e-3)
		if l.Measured != tt.measured || l.Missing != tt.missing {
			t.Errorf("max age %d s: measured %d s, missing %d s; want %d, %d", tt.age/second, l.Measured/second, l.Missing/second, tt.measured/second, tt.missing/second)
		}
	}
}

func TestEachTagKeepsItsOwnAge(t *testing.T) {
	cfg := plant(liquid)
	cfg.Tags[outlet].MaxAge = 5 * second
	e := engine(t, cfg)
	e.Advance(Beat{at(0, 2, 350, 330), through(10)}, nil)
	l := e.Snapshot().Loads[0]
	if l.Figure.Fault != Stale || !strings.Contains(l.Figure.Reason, `"TO"`) {
		t.Errorf("fault %v, reason %q; want stale, naming TO", l.Figure.Fault, l.Figure.Reason)
	}
	if l.Measured != 5*second || l.Missing != 5*second {
		t.Errorf("measured %d s, missing %d s; want 5 and 5", l.Measured/second, l.Missing/second)
	}
}

func TestGapIsMissingAndInventsNothing(t *testing.T) {
	e := engine(t, plant(liquid))
	e.Advance(Beat{at(0, 2, 350, 330), through(0)}, nil)
	week := 7 * 24 * 3600.0
	closed := e.Advance(Beat{at(week, 2, 350, 330), through(week + 60)}, nil)
	l := e.Snapshot().Loads[0]
	near(t, "given", l.Given, 160e3*120, 1e-6)
	if l.Measured != 120*second || l.Missing != int64(week-60)*second {
		t.Errorf("measured %d s, missing %d s; want 120, %d", l.Measured/second, l.Missing/second, int64(week-60))
	}
	if len(closed) != 2 {
		t.Errorf("%d minutes closed, want the 2 that were measured", len(closed))
	}
	near(t, "coverage of the hour", l.Means[2].Coverage, 1.0/60, 1e-3)
}

// Duty is positive in the load's own service; the registers tell which way the
// stream's heat went, whatever the service.
func TestSignsAndServices(t *testing.T) {
	for _, tt := range []struct {
		gives              bool
		in, out            float64
		duty, given, taken float64
	}{
		{true, 350, 330, 160e3, 160e3, 0},  // a heating circuit that heats
		{true, 330, 350, -160e3, 0, 160e3}, // and one that is heated instead
		{false, 280, 290, 80e3, 0, 80e3},   // a chilled circuit that takes heat
		{false, 290, 280, -80e3, 80e3, 0},
	} {
		cfg := plant(liquid)
		cfg.Loads[0].Stream.Gives = tt.gives
		e := engine(t, cfg)
		closed := e.Advance(Beat{at(0, 2, tt.in, tt.out), through(60)}, nil)
		l := e.Snapshot().Loads[0]
		near(t, "duty", l.Figure.Duty, tt.duty, 1e-6)
		near(t, "mean duty", l.Means[0].Duty, tt.duty, 1e-6)
		near(t, "given", l.Given, 60*tt.given, 1e-6)
		near(t, "taken", l.Taken, 60*tt.taken, 1e-6)
		near(t, "duty of the minute", closed[0].Duty, tt.duty, 1e-6)
		near(t, "given in the minute", closed[0].Given, 60*tt.given, 1e-6)
		near(t, "taken in the minute", closed[0].Taken, 60*tt.taken, 1e-6)
	}
}

func TestFaults(t *testing.T) {
	for _, tt := range []struct {
		name      string
		q, ti, to float64
		fluid     steady
		idleBelow float64
		fault     Fault
		idle      bool
		inReason  string
	}{
		{name: "stopped pump", q: 0, ti: 900, to: 1, fluid: liquid, idle: true},
		{name: "zero drift within the threshold", q: -0.01, ti: 350, to: 330, fluid: liquid, idleBelow: 0.02, idle: true},
		{name: "reverse", q: -0.5, ti: 350, to: 330, fluid: liquid, idleBelow: 0.02, fault: Reverse, inReason: "-0.5"},
		{name: "near boiling", q: 2, ti: 416, to: 330, fluid: liquid, fault: Saturation, inReason: "boiling at 146.85 °C"},
		{name: "above boiling", q: 2, ti: 425, to: 330, fluid: liquid, fault: Saturation, inReason: "inlet at 151.85 °C is above boiling at 146.85 °C"},
		{name: "just far enough from boiling", q: 2, ti: 415, to: 330, fluid: liquid},
		{name: "outlet near dew point", q: 2, ti: 400, to: 334, fluid: steady{cp: 1000, rho: 1, lo: 330, hi: 9999, phase: thermo.Gas}, fault: Saturation, inReason: "outlet"},
		{name: "outside the fluid", q: 2, ti: 601, to: 330, fluid: steady{cp: 1000, rho: 1, hi: 9999, phase: thermo.Liquid}, fault: OutOfRange, inReason: "by construction"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			cfg := plant(tt.fluid)
			cfg.Loads[0].Stream.IdleBelow = tt.idleBelow
			e := engine(t, cfg)
			e.Advance(Beat{at(0, tt.q, tt.ti, tt.to), through(1)}, nil)
			l := e.Snapshot().Loads[0]
			if l.Figure.Fault != tt.fault || l.Figure.Idle != tt.idle || !strings.Contains(l.Figure.Reason, tt.inReason) {
				t.Errorf("fault %v, idle %v, reason %q; want %v, %v, ...%s...", l.Figure.Fault, l.Figure.Idle, l.Figure.Reason, tt.fault, tt.idle, tt.inReason)
			}
			if tt.fault != NoFault && (l.Missing != second || l.Given != 0) {
				t.Errorf("missing %d ns, given %g J; want one second and nothing booked", l.Missing, l.Given)
			}
			if tt.idle && (l.Measured != second || l.Given != 0) {
				t.Errorf("measured %d ns, given %g J; an idle load is measured and moves nothing", l.Measured, l.Given)
			}
		})
	}
}

func TestFlowKinds(t *testing.T) {
	warm := steady{cp: 4000, rho: 900, molar: 0.028, hi: 420, phase: thermo.Liquid}
	for _, tt := range []struct {
		kind FlowKind
		want float64
	}{{MassFlow, 2}, {VolumeFlow, 1800}, {MolarFlow, 0.056}} {
		cfg := plant(warm)
		cfg.Loads[0].Stream.FlowKind = tt.kind
		e := engine(t, cfg)
		e.Advance(Beat{at(0, 2, 350, 330), through(1)}, nil)
		near(t, "mass flow", e.Snapshot().Loads[0].Figure.MassFlow, tt.want, 1e-12)
	}
}

func TestRepeatsAndLateReadings(t *testing.T) {
	e := engine(t, plant(liquid))
	e.Advance(Beat{at(0, 2, 350, 330), through(0)}, nil)
	e.Advance(Beat{at(10, 2, 350, 330), through(5)}, nil)
	before := e.Snapshot().Loads[0].Given
	e.Advance(Beat{append(at(10, 9, 350, 330), at(2, 9, 350, 330)...), through(5)}, nil)
	e.Advance(Beat{at(0, 2, 350, 330), through(5)}, nil)
	s := e.Snapshot()
	if got, want := s.Tags[flow].Tally, (Tally{Repeated: 2, Late: 1}); got != want {
		t.Errorf("tally %+v, want %+v", got, want)
	}
	near(t, "given", s.Loads[0].Given, before, 0)
	e.Advance(Beat{nil, through(20)}, nil)
	near(t, "given later", e.Snapshot().Loads[0].Given, 160e3*20, 1e-6) // the first value of a stamp stands
}

func TestMinutes(t *testing.T) {
	e := engine(t, plant(liquid))
	var closed []Minute
	for s := 0.0; s <= 180; s += 10 {
		q := 2.0
		if s >= 90 && s < 120 {
			q = 0
		}
		closed = e.Advance(Beat{at(s, q, 350, 330), through(s)}, closed)
	}
	if len(closed) != 3 {
		t.Fatalf("%d minutes, want 3", len(closed))
	}
	m := closed[1]
	if m.Start != through(60) || m.Measured != minute || m.Idle != 30*second {
		t.Errorf("start %d, measured %d, idle %d", m.Start, m.Measured, m.Idle)
	}
	near(t, "mean duty", m.Duty, 80e3, 1e-6)
	near(t, "least duty", m.DutyMin, 0, 0)
	near(t, "greatest duty", m.DutyMax, 160e3, 1e-6)
	near(t, "mean flow", m.MassFlow, 1, 1e-12)
	near(t, "inlet while flowing", m.Inlet, 350, 1e-9)
}

// A million additions of a tenth: plain addition is off by 1e-6, compensated by
// nothing that shows at 1e-12.
func TestSumDoesNotDrift(t *testing.T) {
	var s Sum
	for range 1_000_000 {
		s.Add(0.1)
	}
	near(t, "sum", s.Value(), 1e5, 1e-12*1e5)
}

func TestGridMustDivideTheMinute(t *testing.T) {
	cfg := plant(liquid)
	cfg.Grid = 7 * second
	if _, err := New(cfg); err == nil || !strings.Contains(err.Error(), "7 s") {
		t.Errorf("New with a grid of 7 s: %v", err)
	}
}

// What a transmitter without a signal may send destroys nothing: a duty that is
// not finite, or that no plant has, is a fault of the moment.
func TestAbsurdFlowIsAFault(t *testing.T) {
	for _, q := range []float64{1e305, math.MaxFloat64, 1e307} {
		for _, kind := range []FlowKind{MassFlow, VolumeFlow} {
			cfg := plant(liquid)
			cfg.Loads[0].Stream.FlowKind = kind
			cfg.Tags[flow].Accuracy = Accuracy{Rel: 0.01}
			e := engine(t, cfg)
			e.Advance(Beat{at(0, 2, 350, 330), through(0)}, nil)
			e.Advance(Beat{at(10, q, 350, 350), through(10)}, nil)
			e.Advance(Beat{at(20, 2, 350, 330), through(30)}, nil)
			l := e.Snapshot().Loads[0]
			if math.IsNaN(l.Given) || math.IsInf(l.Given, 0) || l.Taken != 0 {
				t.Errorf("flow %g, kind %d: given %g J, taken %g J", q, kind, l.Given, l.Taken)
			}
			if l.Missing != 10*second || l.Figure.Fault != NoFault {
				t.Errorf("flow %g, kind %d: missing %d s, fault %v; want 10 s, and none afterwards", q, kind, l.Missing/second, l.Figure.Fault)
			}
		}
	}
}

// A stamp of 2000, as a clock that was never set gives, opens at most an hour of
// missing time.
func TestStrayOldStampOpensAnHourAtMost(t *testing.T) {
	e := engine(t, plant(liquid))
	e.Advance(Beat{append([]Reading{{Tag: flow, At: 946_684_807 * second, Value: 2}}, at(0, 2, 350, 330)...), through(60)}, nil)
	l := e.Snapshot().Loads[0]
	if l.Measured != minute || l.Missing != reachBack-minute {
		t.Errorf("measured %d s, missing %d s; want 60 and the rest of an hour", l.Measured/second, l.Missing/second)
	}
}

// A backlog at the very start, in which event time first waits for a tag that seldom speaks
// and then leaps by hours, is accounted for from its first reading on.
func TestLeapAtTheStartLeavesNothingOut(t *testing.T) {
	e := engine(t, plant(liquid))
	var backlog []Reading
	for s := int64(0); s < 3*3600; s += 30 {
		backlog = append(backlog, at(float64(s), 2, 350, 330)...)
	}
	e.Advance(Beat{backlog[:300], through(-5)}, nil)
	e.Advance(Beat{backlog[300:], through(3 * 3600)}, nil)
	l := e.Snapshot().Loads[0]
	if l.Measured != 180*minute || l.Missing != 0 {
		t.Errorf("measured %d s, missing %d s; want 10800 and 0", l.Measured/second, l.Missing/second)
	}
}

// Where the accounts begin after some of the readings, those are counted as late.
func TestWhatIsBeforeTheBeginningIsCounted(t *testing.T) {
	e := engine(t, plant(liquid))
	var backlog []Reading
	for s := int64(0); s <= 2*3600; s += 30 {
		backlog = append(backlog, at(float64(s), 2, 350, 330)...)
	}
	e.Advance(Beat{backlog, through(2 * 3600)}, nil)
	s := e.Snapshot()
	if l := s.Loads[0]; l.Measured != 60*minute || l.Missing != 0 {
		t.Errorf("measured %d s, missing %d s; want 3600 and 0", l.Measured/second, l.Missing/second)
	}
	for i, tag := range s.Tags { // of each, 121 came up to the beginning, where the last of them is held
		if tag.Late != 120 {
			t.Errorf("tag %d: %d late; want 120", i, tag.Late)
		}
	}
}

// Amounts of the first grid step wait each for itself, and none of them is late.
func TestAmountsAtTheBeginningAreNotLate(t *testing.T) {
	cfg := plant(liquid)
	cfg.Tags[flow] = Tag{Name: "flow", MaxAge: minute, Counter: &Counter{Each: true}}
	cfg.Loads[0].Stream.FlowKind = VolumeFlow
	e := engine(t, cfg)
	beat := Beat{at(0.9, 0.01, 350, 330), through(10)}
	for i := range int64(8) {
		beat.Readings = append(beat.Readings, Reading{Tag: flow, At: epoch + (i+1)*100_000_000, Value: 0.01})
	}
	e.Advance(beat, nil)
	if late := e.Snapshot().Tags[flow].Late; late != 0 {
		t.Errorf("%d late; want none", late)
	}
}

// Many readings for one grid point wait as one, so a burst is no crowd, and the
// last of them is the one that counts.
func TestBurstWithinAGridStep(t *testing.T) {
	e := engine(t, plant(liquid))
	var burst []Reading
	for i := range int64(10_000) {
		burst = append(burst, Reading{Tag: flow, At: epoch + 1 + i*99_000, Value: float64(i)})
	}
	e.Advance(Beat{append(burst, at(0, 2, 350, 330)[1:]...), through(0)}, nil)
	e.Advance(Beat{burst[5000:5001], through(2)}, nil)
	s := e.Snapshot()
	if got := s.Tags[flow].Tally; got.Crowded != 0 || got.Late != 0 {
		t.Errorf("tally %+v, want no crowd and nothing late", got)
	}
	near(t, "flow", s.Loads[0].Figure.MassFlow, 9999, 0)
}

// A figure is fresh as long as a newer reading waits for event time to reach it, but
// no longer than a tag's age from where event time stands: it may be stuck.
func TestUntilCountsWaitingReadings(t *testing.T) {
	e := engine(t, plant(liquid))
	e.Advance(Beat{at(0, 2, 350, 330), through(31)}, nil)
	e.Advance(Beat{at(20, 2, 350, 330), through(31)}, nil) // late
	if got, want := e.Snapshot().Loads[0].Until, through(60); got != want {
		t.Errorf("until %d s, want %d", (got-epoch)/second, (want-epoch)/second)
	}
	e.Advance(Beat{at(50, 2, 350, 330), through(31)}, nil)
	if got, want := e.Snapshot().Loads[0].Until, through(30+60); got != want {
		t.Errorf("until %d s, want %d", (got-epoch)/second, (want-epoch)/second)
	}
}

func TestAdoptHoldsAndBooksNothing(t *testing.T) {
	e := engine(t, plant(liquid))
	e.Advance(Beat{at(0, 2, 350, 330), through(10)}, nil)
	before := e.Snapshot().Loads[0]
	e.Adopt(Beat{at(20, 3, 350, 330), through(30)})
	after := e.Snapshot()
	if after.Loads[0].Given != before.Given || after.Loads[0].Measured != before.Measured || after.Through != through(30) {
		t.Errorf("given %g J, measured %d, through %d; want %g, %d, %d", after.Loads[0].Given, after.Loads[0].Measured, after.Through, before.Given, before.Measured, through(30))
	}
	e.Advance(Beat{nil, through(40)}, nil)
	near(t, "heat after", e.Snapshot().Loads[0].Given-before.Given, 3*4000*20*10, 1e-6)
}

// What Adopt passes over was closed elsewhere: no part of such a minute comes out.
func TestAdoptLeavesTheMinuteAlone(t *testing.T) {
	e := engine(t, plant(liquid))
	e.Advance(Beat{at(0, 2, 350, 330), through(24)}, nil)
	e.Adopt(Beat{at(50, 2, 350, 330), through(70)})
	for _, m := range e.Advance(Beat{at(100, 2, 350, 330), through(130)}, nil) {
		if m.Start == epoch {
			t.Errorf("minute 0 comes out with %d s measured", m.Measured/second)
		}
	}
}
