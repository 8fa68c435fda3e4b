package loads

import (
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// A flow that swings as a sine, 2 + sin(ωt) kg/s, against a difference that climbs as a
// ramp, 10 K + bt:
//
//	f(t) = cp·(2 + sin ωt)·(10 + bt)
//	∫f   = cp·[20T + bT² + 10(1 − cos ωT)/ω + b(sin ωT/ω² − T cos ωT/ω)]
type swing struct{ cp, omega, b, T float64 }

var swinging = swing{cp: 4000, omega: 2 * math.Pi / 307, b: 0.01, T: 1800}

func (s swing) flow(t float64) float64       { return 2 + math.Sin(s.omega*t) }
func (s swing) difference(t float64) float64 { return 10 + s.b*t }
func (s swing) duty(t float64) float64       { return s.cp * s.flow(t) * s.difference(t) }

func (s swing) heat() float64 {
	w, T := s.omega, s.T
	return s.cp * (20*T + s.b*T*T + 10*(1-math.Cos(w*T))/w + s.b*(math.Sin(w*T)/w/w-T*math.Cos(w*T)/w))
}

// slope bounds |f′|, also where the factors are held for unequal times, and fourth |f⁗|.
func (s swing) slope() float64 { return s.cp * (s.omega*s.difference(s.T) + 3*s.b) }
func (s swing) fourth() float64 {
	return s.cp * math.Pow(s.omega, 3) * (s.omega*s.difference(s.T) + 4*s.b)
}

// climb is f′.
func (s swing) climb(t float64) float64 {
	return s.cp * (s.omega*math.Cos(s.omega*t)*s.difference(t) + s.b*s.flow(t))
}

// run puts the swing through, with flow and temperatures read every period from their own
// first instants on.
func (s swing) run(t *testing.T, grid, period int64, first, then float64) float64 {
	t.Helper()
	cfg := plant(liquid)
	cfg.Grid = grid
	e := engine(t, cfg)
	step := float64(period) / 1e9
	rr := []Reading{at(0, s.flow(0), 0, 330)[flow], at(0, 0, 330+s.difference(0), 330)[inlet], at(0, 0, 0, 330)[outlet]}
	for k := 0.0; k*step < s.T; k++ {
		a, b := first+k*step, then+k*step
		rr = append(rr, at(a, s.flow(a), 0, 0)[flow], at(b, 0, 330+s.difference(b), 0)[inlet], at(b, 0, 0, 330)[outlet])
	}
	e.Advance(Beat{rr, through(s.T)}, nil)
	l := accounted(t, e, int64(s.T), 0, 0, 0)
	return l.Given - l.Taken
}

// Held over a grid step h from its beginning, the register is off by Σ∫(f(g) − f(t))dt, at
// most T·h/2·max|f′|. The Euler-Maclaurin sum tells by how much,
//
//	h/2·(f(0) − f(T)) + h²/12·(f′(T) − f′(0)),
//
// but for at most T·h⁴/720·max|f⁗|. Both are asserted.
func TestSineOfFlowOnARampOfTemperature(t *testing.T) {
	s := swinging
	for _, h := range []float64{0.5, 1, 2, 5, 10, 20, 60} {
		grid := int64(h * 1e9)
		off := s.run(t, grid, grid, 0, 0) - s.heat()
		if bound := s.T * h / 2 * s.slope(); math.Abs(off) > bound {
			t.Errorf("grid %g s: off by %g J, more than %g", h, off, bound)
		}
		told := h/2*(s.duty(0)-s.duty(s.T)) + h*h/12*(s.climb(s.T)-s.climb(0))
		bound := s.T*math.Pow(h, 4)/720*s.fourth() + 1e-12*s.heat() // and the rounding of the sum
		t.Logf("grid %g s: off by %.6g J of %.6g, %.2g J of them not told; bound %.2g", h, off, s.heat(), off-told, bound)
		near(t, "distance to the integral", off, told, bound)
	}
}

// Readings every 7 s, of flow and temperatures not at once and off the grid, are up to 7 s
// old at a grid point, so that the register is off by at most T·(7 s + h/2)·max|f′|.
func TestHeldReadingsOffTheGrid(t *testing.T) {
	s := swinging
	for _, h := range []float64{1, 2, 5, 10, 20} {
		off := s.run(t, int64(h*1e9), 7*second, 0.3, 4.9) - s.heat()
		if bound := s.T * (7 + h/2) * s.slope(); math.Abs(off) > bound {
			t.Errorf("grid %g s: off by %g J, more than %g", h, off, bound)
		}
	}
}

// Steps of the flow at any instant are seen at the next grid point, so that each leaves
// its jump times the way to there: nothing else is lost.
func TestStepsAgainstTheIntegral(t *testing.T) {
	times, flows := []float64{0, 61.5, 118, 200.25, 333, 471.1}, []float64{1, 3, 0, 2.5, 0.5, 2}
	for _, h := range []float64{0.5, 1, 2, 5, 10, 20, 60} {
		cfg := plant(liquid)
		cfg.Grid = int64(h * 1e9)
		for i := range cfg.Tags {
			cfg.Tags[i].MaxAge = 10 * minute
		}
		e := engine(t, cfg)
		rr := at(0, 0, 350, 330)[1:]
		var integral, lag float64
		for k, s := range times {
			end := 600.0
			if k+1 < len(times) {
				end = times[k+1]
			}
			integral += 80e3 * flows[k] * (end - s)
			if k > 0 {
				lag += 80e3 * (flows[k] - flows[k-1]) * (math.Ceil(s/h)*h - s)
			}
			rr = append(rr, at(s, flows[k], 0, 0)[flow])
		}
		e.Advance(Beat{rr, through(600)}, nil)
		l := accounted(t, e, 600, 0, 0, 0)
		near(t, "given", l.Given, integral-lag, 1e-3)
	}
}

// A bridge's heat is its time times the mean of the duties at its ends, on any grid: the
// line rises by equal steps from the last grid point before to the first after, and of n
// steps in between the mean is the middle. Steps, held for 20 s: 80 kW to 310 s, a gap,
// 160 kW from 400 s on, so 90 s·120 kW = 10800 kJ.
func TestStepsWithAGapOnAnyGrid(t *testing.T) {
	for _, h := range []float64{0.5, 1, 2, 5, 10} {
		cfg := bridging()
		cfg.Grid = int64(h * 1e9)
		for i := range cfg.Tags {
			cfg.Tags[i].MaxAge = 20 * second
		}
		e := engine(t, cfg)
		for s := 0.0; s <= 500; s += 10 {
			switch {
			case s <= 290:
				e.Advance(Beat{at(s, 1, 350, 330), through(s)}, nil)
			case s >= 400:
				e.Advance(Beat{at(s, 2, 350, 330), through(s)}, nil)
			}
		}
		l := accounted(t, e, 310+100, 90, 0, 0)
		near(t, "given", l.Given, 80e3*310+160e3*100, 1e-6)
		near(t, "bridged", l.BridgedGiven, 10800e3, 1e-4)
	}
}

// A ramp of duty is the same with a bridge across a part of it as without the gap.
func TestBridgeOfARampIsTheRamp(t *testing.T) {
	for _, h := range []int64{1, 2, 5} {
		var heat [2]float64
		for k, gap := range []bool{false, true} {
			cfg := bridging()
			cfg.Grid = h * second
			for i := range cfg.Tags {
				cfg.Tags[i].MaxAge = h * second
			}
			e := engine(t, cfg)
			for s := int64(0); s <= 600; s += h {
				if !gap || s < 200 || s >= 300 {
					e.Advance(Beat{at(float64(s), 1, 330+float64(s)/20, 330), through(float64(s))}, nil)
				}
			}
			l := e.Snapshot().Loads[0]
			heat[k] = l.Given + l.BridgedGiven
			if gap == (l.Bridged == 0) || l.Missing != 0 {
				t.Errorf("grid %d s, gap %v: bridged %d ns, missing %d", h, gap, l.Bridged, l.Missing)
			}
		}
		near(t, "heat with a gap", heat[1], heat[0], 1e-9*heat[0])
	}
}

// Readings that hold for one grid step only, with a line between them, give the
// trapezoids. 100, 120, 90, 150, 150 and 60 kW at 0, 10, 25, 40, 70 and 90 s are 11075 kJ
// by trapezoids; the register, which takes each second at its beginning, has half a second
// of (first − last) more: 20 kJ. Where no more than 20 s are bridged the trapezoids are
// 6575 kJ over 60 s of 90, and the register has 25 kJ more for the first run, 45 for the
// second, less the other way round, and 150 kJ for the second at 40 s (all arithmetic).
func TestLinesBetweenReadingsAreTrapezoids(t *testing.T) {
	for _, tt := range []struct {
		bridge           int64
		heat             float64
		covered, missing int64
	}{
		{29, 11075e3 + 20e3, 90, 0},
		{19, 6575e3 + (100e3-150e3)/2 + (150e3-60e3)/2 + 150e3, 61, 29},
	} {
		cfg := bridging()
		cfg.Bridge = tt.bridge * second
		for i := range cfg.Tags {
			cfg.Tags[i].MaxAge = second
		}
		e := engine(t, cfg)
		var rr []Reading
		for i, s := range []float64{0, 10, 25, 40, 70, 90} {
			kW := []float64{100, 120, 90, 150, 150, 60}[i]
			rr = append(rr, at(s, kW*1e3/4000/20, 350, 330)...)
		}
		e.Advance(Beat{rr, through(91)}, nil)
		l := e.Snapshot().Loads[0]
		near(t, "heat", l.Given+l.BridgedGiven-60e3, tt.heat, 1e-3) // without the second from 90 s on
		if l.Measured+l.Bridged != (tt.covered+1)*second || l.Missing != tt.missing*second {
			t.Errorf("measured %d, bridged %d, missing %d ns; want %d s covered, %d s missing", l.Measured, l.Bridged, l.Missing, tt.covered+1, tt.missing)
		}
	}
}

// A year of seconds in a register, of figures that are known to the last bit: multiples
// of 2⁻²⁰ J below 2¹⁷ J, whose sum is a whole number of 2⁻²⁰ J. Plain addition is off
// by what this allows and more.
func TestYearOfSecondsAddsUp(t *testing.T) {
	const year = 365 * 24 * 3600
	rng := rand.New(rand.NewPCG(1, 2))
	var s Sum
	var plain float64
	var exact int64
	for range year {
		n := rng.Int64N(1 << 37)
		x := float64(n) / (1 << 20)
		s.Add(x)
		plain += x
		exact += n
	}
	want := float64(exact) / (1 << 20)
	t.Logf("%d additions come to %.17g J: off by %g, plain addition by %g", year, want, s.Value()/want-1, plain/want-1)
	near(t, "sum", s.Value(), want, 1e-15*want)
	if plain == want {
		t.Error("plain addition is exact, so that this proves nothing")
	}
}

// A hundred days of grid points through the whole engine, 8.6 million, with another duty
// every ten minutes: the register is the sum of duty times time, worked with 200 bits,
// within 1e-12; and so is that of the minutes.
func TestHundredDaysOfGridPointsAddUp(t *testing.T) {
	const days, hold = 100, 600
	cfg := plant(liquid)
	for i := range cfg.Tags {
		cfg.Tags[i].MaxAge = 2 * hold * second
	}
	e := engine(t, cfg)
	rng := rand.New(rand.NewPCG(3, 4))
	exact := new(big.Float).SetPrec(200)
	term := new(big.Float).SetPrec(200)
	var minutes Sum
	var closed []Minute
	for s := 0; s < days*24*3600; s += hold {
		closed = e.Advance(Beat{at(float64(s), 1+rng.Float64(), 340+10*rng.Float64(), 330), through(float64(s + hold))}, closed[:0])
		for _, m := range closed {
			minutes.Add(m.Given)
		}
		term.SetFloat64(e.Snapshot().Loads[0].Figure.Duty)
		exact.Add(exact, term.Mul(term, big.NewFloat(hold)))
	}
	want, _ := exact.Float64()
	l := accounted(t, e, days*24*3600, 0, 0, 0)
	t.Logf("%.17g J: register off by %g, minutes by %g", want, l.Given/want-1, minutes.Value()/want-1)
	near(t, "register", l.Given, want, 1e-15*want)
	near(t, "minutes", minutes.Value(), want, 1e-12*want)
}
