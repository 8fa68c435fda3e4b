package loads

import (
	"math"
	"math/rand/v2"
	"testing"
)

// storing is the plant corrected for a content of 250 l and 120 kg of steel at 490 J/(kg K).
func storing() Config {
	cfg := plant(liquid)
	s := &cfg.Loads[0].Stream
	s.Stored, s.StoredOver = 0.25*1000*4000+120*490, 2*minute
	return cfg
}

// started simulates a circuit of 2 kg/s that starts to give 100 kW while its inlet
// rises by 20 K within five minutes. What lies between the thermometers is two mixed nodes of
// half the capacity each; half of the heat leaves each of them. Noise in K is added to what
// the thermometers show. It returns the error of the heat of the start, and the root mean
// square of that of the duty.
func started(t *testing.T, cfg Config, capacity, noise float64) (heat, duty float64) {
	t.Helper()
	random := rand.New(rand.NewPCG(7, 8))
	const mcp, dt, demand, until = 8000.0, 0.1, 100e3, 1800
	e := engine(t, cfg)
	T1, T2 := 330-demand/2/mcp, 330-demand/mcp
	var at0 LoadState
	var squares float64
	for s := 0; s <= until; s++ {
		in := 330 + 20*min(1, max(0, float64(s)-300)/300)
		e.Advance(Beat{at(float64(s), 2, in+noise*random.NormFloat64(), T2+noise*random.NormFloat64()), through(float64(s))}, nil)
		switch l := e.Snapshot().Loads[0]; {
		case s == 200:
			at0 = l
		case s > 200 && l.Figure.Fault != NoFault:
			t.Fatalf("%d s: fault %v (%s)", s, l.Figure.Fault, l.Figure.Reason)
		case s > 200:
			squares += (l.Figure.Duty - demand) * (l.Figure.Duty - demand)
		}
		for range 10 {
			in1, out1 := mcp*(in-T1)-demand/2, mcp*(T1-T2)-demand/2
			T1 += in1 / (capacity / 2) * dt
			T2 += out1 / (capacity / 2) * dt
		}
	}
	l := e.Snapshot().Loads[0]
	return l.Given - l.Taken - at0.Given + at0.Taken - demand*(until-200), math.Sqrt(squares / (until - 200))
}

// Of the heat that a start puts into pipe and content, 21 MJ here and as much as the load
// itself takes in three and a half minutes, the correction leaves less than a two-hundredth
// in the account, and less than a sixth in the duty.
func TestStoredHeatOfAStart(t *testing.T) {
	cfg := storing()
	capacity := cfg.Loads[0].Stream.Stored
	plain := storing()
	plain.Loads[0].Stream.Corrections = Corrections{}
	for _, noise := range []float64{0, 0.02} {
		heat, duty := started(t, cfg, capacity, noise)
		without, rms := started(t, plain, capacity, noise)
		near(t, "heat booked wrongly without", without, 20*capacity, 0.01*20*capacity)
		near(t, "heat booked wrongly", heat, 0, without/200)
		if !(duty < rms/6) {
			t.Errorf("noise of %g K: duty is off by %.3g W rms, %.3g W without; want less than a sixth", noise, duty, rms)
		}
	}
}

// A steady climb is a closed form: both ends rise by 10 mK a second, so the content keeps
// back C·dT/dt, and of a capacity that drawings tell within 10 % that share is open.
func TestStoredHeatOfASteadyClimb(t *testing.T) {
	for _, gives := range []bool{true, false} {
		cfg := storing()
		cfg.Loads[0].Stream.Gives = gives
		e := engine(t, cfg)
		for s := 0.0; s <= 300; s++ {
			e.Advance(Beat{at(s, 2, 340+s/100, 330+s/100), through(s)}, nil)
		}
		f := e.Snapshot().Loads[0].Figure
		stored := cfg.Loads[0].Stream.Stored / 100
		want, share := 80e3-stored, -stored*0.1/math.Sqrt(3)
		if !gives {
			want, share = -80e3+stored, stored*0.1/math.Sqrt(3)
		}
		near(t, "duty", f.Duty, want, 1e-6)
		near(t, "share of the content", f.Share[PartContent], share, 1e-6)
	}
}

// Until both thermometers tell a rate there is no figure; a pump that stands is at rest
// whatever they show.
func TestStoredHeatIsFitted(t *testing.T) {
	e := engine(t, storing())
	for s := 0.0; s <= 40; s += 10 {
		e.Advance(Beat{at(s, 2, 350, 330), through(s)}, nil)
	}
	checkFigure(t, e, Fitting, `tag "TI": 4 points over 30 s of the last 120 s do not tell a rate yet; 3 over half of it do`)
	e.Advance(Beat{at(50, 0, 350, 330), through(51)}, nil)
	if f := e.Snapshot().Loads[0].Figure; !f.Idle || f.Duty != 0 {
		t.Errorf("fault %v, duty %g W; want idle", f.Fault, f.Duty)
	}
}

// The rise of what is stored has a scatter of its own: the random uncertainty says how far
// the duty is off.
func TestScatterOfStoredHeat(t *testing.T) {
	random := rand.New(rand.NewPCG(9, 10))
	const sigma = 0.02
	cfg := storing()
	e := engine(t, cfg)
	var squares, said float64
	n := 0.0
	for s := 0.0; s <= 20000; s++ {
		e.Advance(Beat{at(s, 2, 350+sigma*random.NormFloat64(), 330+sigma*random.NormFloat64()), through(s)}, nil)
		if f := e.Snapshot().Loads[0].Figure; s > 200 {
			squares += (f.Duty - 160e3) * (f.Duty - 160e3)
			said += f.Random * f.Random
			n++
		}
	}
	near(t, "root mean square of the stated uncertainty", math.Sqrt(said/n), math.Sqrt(squares/n), 0.1*math.Sqrt(squares/n))
}
