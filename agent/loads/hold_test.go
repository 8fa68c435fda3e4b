package loads

import (
	"math"
	"strings"
	"testing"

	"heatreeve/thermo/water"
)

// piped is the plant with a hold in m³ and a flow by volume.
func piped(hold float64) Config {
	cfg := plant(liquid)
	cfg.Loads[0].Stream.FlowKind = VolumeFlow
	cfg.Loads[0].Stream.Hold = hold
	return cfg
}

// 40 m of DN50 with 2 L/s is passed in π/4·0.05²·40/0.002 = 39.3 s. A step of the inlet
// that comes out as late as that is no heat, but for the second of the grid in which it
// comes.
func TestHoldOfAPipe(t *testing.T) {
	hold := math.Pi / 4 * 0.05 * 0.05 * 40
	delay := hold / 2e-3
	near(t, "delay", delay, 39.3, 0.05)
	for _, held := range []float64{hold, 0} {
		e := engine(t, piped(held))
		for s := 0.0; s <= 600; s++ {
			in, out := 330.0, 330.0
			if s >= 300 {
				in = 350
			}
			if s >= 300+delay {
				out = 350
			}
			e.Advance(Beat{at(s, 2e-3, in, out), through(s)}, nil)
			if f := e.Snapshot().Loads[0].Figure; held > 0 && s > 0 && s < math.Ceil(delay) && (f.Fault != Fitting || !strings.Contains(f.Reason, "of the hold of 78.54 l")) {
				t.Fatalf("%g s: fault %v (%s), want the hold filling", s, f.Fault, f.Reason)
			}
		}
		l := e.Snapshot().Loads[0]
		if held > 0 {
			near(t, "heat", l.Given+l.Taken, 0, 160e3) // 8 kJ/K·20 K in one second
			near(t, "missing", float64(l.Missing)/1e9, math.Ceil(delay), 0)
		} else {
			near(t, "heat without", l.Given, 160e3*40, 1)
		}
	}
}

// A temperature that sways, let through a pipe of forty seconds that keeps all heat, comes
// out as it went in: the duty is zero at every instant, and not by 160 kW as without.
func TestHoldAgainstADelayedSignal(t *testing.T) {
	e := engine(t, piped(0.08))
	signal := func(s float64) float64 { return 340 + 10*math.Sin(s/30) }
	worst := 0.0
	for s := 0.0; s <= 1800; s++ {
		e.Advance(Beat{at(s, 2e-3, signal(s), signal(s-40)), through(s)}, nil)
		if f := e.Snapshot().Loads[0].Figure; s > 42 {
			if !f.Measured() {
				t.Fatalf("%g s: fault %v (%s)", s, f.Fault, f.Reason)
			}
			worst = max(worst, math.Abs(f.Duty))
		}
	}
	near(t, "worst duty", worst, 0, 1e-6)
}

// With a flow that varies and stops, the parcel that leaves is the one that came in when as
// much less had passed as the hold is: found here from the sum of all that has passed. The
// hold is cut into sixtieths, and what joins in one is mixed, also what came before a stop
// with what came after.
func TestHoldWithAFlowThatVaries(t *testing.T) {
	const hold = 0.25
	e := engine(t, piped(hold))
	flowAt := func(s float64) float64 {
		if math.Mod(s, 700) < 200 {
			return 0
		}
		return 2e-3 + 1.5e-3*math.Sin(s/50)
	}
	inletAt := func(s float64) float64 { return 340 + 10*math.Sin(s/97) }
	passed := []float64{0} // by each second, m³
	var left, without float64
	for s := 0; s <= 3600; s++ {
		x := float64(s)
		out := 340.0
		if at := passed[s] + flowAt(x)/2 - hold; at > 0 { // the middle of what leaves now
			k := 0
			for passed[k+1] <= at {
				k++
			}
			out = inletAt(float64(k))
		}
		e.Advance(Beat{at(x, flowAt(x), inletAt(x), out), through(x + 1)}, nil)
		passed = append(passed, passed[s]+flowAt(x))
		if f := e.Snapshot().Loads[0].Figure; passed[s] >= hold && !f.Idle {
			if !f.Measured() {
				t.Fatalf("%d s: fault %v (%s)", s, f.Fault, f.Reason)
			}
			left += math.Abs(f.Duty)
			without += f.MassFlow * 4000 * math.Abs(inletAt(x)-out)
		}
	}
	if !(left < 0.015*without) {
		t.Errorf("false heat of %.3g J is left of %.3g J; want less than 1.5 %%", left, without)
	}
}

// What enters leaves: whatever the flow did, the heat of a long run is that of all that
// came in, less what is still there, less that of all that went out.
func TestHoldLosesNothing(t *testing.T) {
	const hold = 0.1
	e := engine(t, piped(hold))
	var in, out, given float64
	started := false
	for s := 0.0; s < 7200; s++ {
		q := 1e-3 * (1 + math.Sin(s/7))
		if q < 1e-4 {
			q = 0
		}
		T, cold := 350+8*math.Sin(s/41), 330+3*math.Cos(s/29)
		before := e.loads[0].Hold
		entered := before.heat()
		e.Advance(Beat{at(s, q, T, cold), through(s + 1)}, nil)
		f := e.Snapshot().Loads[0].Figure
		if f.Measured() && !f.Idle && !started {
			started = true
			in = entered // what was there when it was full
		}
		if started {
			in += q * T
			out += q * cold
			given += f.Duty
		}
	}
	want := (in - e.loads[0].Hold.heat() - out) * liquid.rho * liquid.cp
	near(t, "heat", given, want, 1e-9*math.Abs(in)*liquid.rho*liquid.cp)
	near(t, "register", e.Snapshot().Loads[0].Given-e.Snapshot().Loads[0].Taken, given, 1e-6*given)
	near(t, "content", e.loads[0].Hold.volume(), hold, 1e-12)
	if n := len(e.loads[0].Hold.Parcels); n > slots+2 {
		t.Errorf("%d parcels, want at most %d", n, slots+2)
	}
}

// heat is that of the content over ρ·cp.
func (q *queue) heat() (sum float64) {
	for _, p := range q.Parcels {
		sum += p.Volume * p.T
	}
	return sum
}

// After time without a flow nobody knows what is in the pipe: it must be filled again. A
// lost outlet thermometer does not empty it, a stopped flow neither.
func TestHoldAfterAGap(t *testing.T) {
	for _, tt := range []struct {
		lost  int
		fault Fault
	}{{flow, Fitting}, {inlet, Fitting}, {outlet, NoFault}} {
		e := engine(t, piped(0.06)) // half a minute
		for s := 0.0; s <= 320; s++ {
			readings := at(s, 2e-3, 350, 330)
			if s > 100 && s <= 300 {
				readings = append(readings[:tt.lost:tt.lost], readings[tt.lost+1:]...)
			}
			e.Advance(Beat{readings, through(s)}, nil)
		}
		if f := e.Snapshot().Loads[0].Figure; f.Fault != tt.fault {
			t.Errorf("tag %d lost: fault %v (%s), want %v", tt.lost, f.Fault, f.Reason, tt.fault)
		}
	}
	e := engine(t, piped(0.06))
	for s := 0.0; s <= 300; s++ {
		q := 2e-3
		if s > 100 && s <= 280 {
			q = 0
		}
		e.Advance(Beat{at(s, q, 350, 330), through(s)}, nil)
	}
	near(t, "missing", float64(e.Snapshot().Loads[0].Missing)/1e9, 30, 0)
}

// A flow by mass or by amount of substance displaces at the inlet's density.
func TestHoldByMass(t *testing.T) {
	for _, kind := range []FlowKind{MassFlow, MolarFlow} {
		cfg := piped(0.06)
		f := liquid
		f.rho = 800
		cfg.Loads[0].Stream.Fluid, cfg.Loads[0].Stream.FlowKind = f, kind
		q := 1.6 // kg/s: 2 L/s
		if kind == MolarFlow {
			q /= f.molar
		}
		e := engine(t, cfg)
		for s := 0.0; s <= 60; s++ {
			e.Advance(Beat{at(s, q, 350, 330), through(s)}, nil)
		}
		near(t, "missing", float64(e.Snapshot().Loads[0].Missing)/1e9, 30, 0)
	}
}

// 3 bar of a pump of an efficiency of 0.6 leave v·Δp/η = 0.508 kJ in a kilogram of water at 60
// °C (v = 1.0171e-3 m³/kg, IAPWS-IF97). Of a circuit that gives heat it comes on top; one
// that takes heat has taken that much less.
func TestPumpHeat(t *testing.T) {
	w := water.Liquid()
	s, err := w.At(333.15, 4e5)
	if err != nil {
		t.Fatal(err)
	}
	const flowing = 2.0
	power := flowing * 3e5 / s.Density / 0.6
	near(t, "heat in a kilogram", power/flowing, 508, 1)
	for _, gives := range []bool{true, false} {
		cfg := plant(w)
		cfg.Tags = append(cfg.Tags, Tag{Name: "JT", MaxAge: minute, Accuracy: Accuracy{Rel: 0.1 * math.Sqrt(3)}})
		st := &cfg.Loads[0].Stream
		st.Gives, st.Pump, st.HasPump = gives, FromTag(3), true
		plain := plant(w)
		plain.Loads[0].Stream.Gives = gives
		var duty, share, cp [2]float64
		for i, cfg := range []Config{plain, cfg} {
			e := engine(t, cfg)
			readings := append(at(0, flowing, 333.15, 330), Reading{Tag: 3, At: epoch, Value: power})
			e.Advance(Beat{readings[:len(cfg.Tags)], through(1)}, nil)
			f := e.Snapshot().Loads[0].Figure
			duty[i], share[i] = f.Duty, f.Share[PartPump]
			cp[i] = f.Share[PartCp]
		}
		by := power
		if !gives {
			by = -power
		}
		near(t, "pump heat", duty[1]-duty[0], by, 1e-6)
		near(t, "share of heat capacity", cp[1], cp[0], 1e-9) // that of the stream alone
		near(t, "share of the pump", share[1], by/10, 1e-6)
		// a stopped pump leaves nothing, whatever its power reads
		e := engine(t, cfg)
		e.Advance(Beat{append(at(0, 0, 333.15, 330), Reading{Tag: 3, At: epoch, Value: power}), through(1)}, nil)
		if f := e.Snapshot().Loads[0].Figure; !f.Idle || f.Duty != 0 {
			t.Errorf("idle %v, duty %g W; want idle, and nothing", f.Idle, f.Duty)
		}
		r, err := Work(st, State{Flow: flowing, Inlet: 333.15, Outlet: 330, Pressure: 5e5, OutletPressure: 5e5, Pump: power})
		if err != nil || r.Duty != duty[1] {
			t.Errorf("by hand %g W, %v; the engine has %g", r.Duty, err, duty[1])
		}
	}
}
