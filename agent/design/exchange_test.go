package design

import (
	"bytes"
	"encoding/gob"
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"heatreeve/agent/design/cause"
	"heatreeve/agent/design/exchanger"
)

// bench is an exchanger of 12 kW/K in counterflow, water on both sides, with instruments whose
// errors may be set.
type bench struct {
	*Plant
	noise   *rand.Rand
	at      int64
	fouling float64 // K/W
	errors  exchanger.State
	flow    float64 // of the hot side, kg/s
}

var clean = exchanger.Model{
	Hot:  exchanger.Film{Resistance: 1. / 30e3, Flow: 2, Exponent: 0.8},
	Cold: exchanger.Film{Resistance: 1. / 40e3, Flow: 3, Exponent: 0.8},
	Wall: 0.025e-3,
}

func newBench(seed uint64) *bench {
	target := func(name string) Target {
		return Target{Name: name, Allow: 0.08, Lasting: 10 * time.Minute, ByExchanger: true, Tags: Tags{name + "-F", name + "-I", name + "-O"}}
	}
	return &bench{noise: rand.New(rand.NewPCG(seed, 9)), flow: 2, Plant: NewPlant(Config{
		Loads: []Target{target("hot"), target("cold")},
		Exchangers: []Exchanger{{
			Name: "plates", Hot: 0, Cold: 1, Model: clean, Uncertainty: 0.02, Calibrated: true, Lasting: 10 * time.Minute, Allowance: 0.02e-3,
		}},
	})}
}

// run plays so many minutes and returns the warnings that came and went.
func (b *bench) run(t testing.TB, minutes int) (told []Warning) {
	t.Helper()
	for range minutes {
		s := exchanger.State{
			Hot:  exchanger.Stream{Flow: b.flow * (1 + 0.1*math.Sin(float64(b.at)/float64(7*time.Hour))), Cp: 4180, Inlet: 363},
			Cold: exchanger.Stream{Flow: 3, Cp: 4180, Inlet: 313},
		}
		m := clean
		m.Wall += b.fouling
		q, err := m.Duty(&s)
		if err != nil {
			t.Fatal(err)
		}
		s.Hot.Outlet, s.Cold.Outlet = s.Hot.Inlet-q/s.Hot.Capacity(), s.Cold.Inlet+q/s.Cold.Capacity()
		for i, x := range [...][2]exchanger.Stream{{s.Hot, b.errors.Hot}, {s.Cold, b.errors.Cold}} {
			y := x[0]
			y.Flow *= 1 + x[1].Flow + 0.001*b.noise.NormFloat64()
			y.Inlet += x[1].Inlet + 0.02*b.noise.NormFloat64()
			y.Outlet += x[1].Outlet + 0.02*b.noise.NormFloat64()
			duty := math.Abs(y.Capacity() * (y.Inlet - y.Outlet))
			b.Observe(i, Minute{
				Start: b.at, Whole: true, Duty: duty, Uncertainty: 0.008 * duty, Flow: y.Flow, Inlet: y.Inlet, Outlet: y.Outlet,
				FlowError: 0.003 * y.Flow, InletError: 0.1, OutletError: 0.1, CpError: 0.001,
			}, 0)
		}
		b.at += nanosecondsPerMinute
		told = append(told, b.Changed()...)
	}
	return told
}

const dayOfMinutes = 24 * 60

func TestCleanExchangerWarnsOfNothing(t *testing.T) {
	b := newBench(1)
	if told := b.run(t, 10*dayOfMinutes); len(told) > 0 {
		t.Errorf("warnings: %+v", told)
	}
	s := b.Exchanger(0)
	if s.At == 0 || s.Why != "" || math.Abs(s.Ratio) > 0.02 || math.Abs(s.Zeta()) > 2 {
		t.Errorf("standing: ratio %v, zeta %v, %q", s.Ratio, s.Zeta(), s.Why)
	}
	g := b.Grounds(0)
	if g.Verdict != Holding || math.Abs(g.Deviation) > 0.01*g.Expected {
		t.Errorf("hot side: %v, %v W off %v W", g.Verdict, g.Deviation, g.Expected)
	}
	if u := g.Uncertainty(); !(u < math.Hypot(g.Measured, g.ExpectedLasting)) {
		t.Errorf("the deviation is %v W uncertain, measured %v W and expected %v W; what they share must drop out", u, g.Measured, g.ExpectedLasting)
	}
}

// A conductance that falls by a tenth in thirty days is warned of before it has fallen by 12 %,
// though the duty stays within its allowance, and it is fouling that is named.
func TestFoulingIsWarnedOf(t *testing.T) {
	b := newBench(2)
	if told := b.run(t, 10*dayOfMinutes); len(told) > 0 {
		t.Fatalf("warnings while clean: %+v", told)
	}
	for day := range 36 {
		lost := 0.1 * float64(day) / 30
		b.fouling = (1/(1-lost) - 1) / 12e3
		for _, w := range b.run(t, dayOfMinutes) {
			if w.Kind != WarnFouling || w.Subject != "plates" || w.End != 0 {
				t.Fatalf("day %d: %+v", day, w)
			}
			if lost > 0.12 || w.Now > 0 || len(w.Causes) == 0 || w.Causes[0].Kind != cause.Fouling {
				t.Errorf("warned at a loss of %.3g by %+v", lost, w)
			}
			if since := w.Since / nanosecondsPerDay; since < 10 || since > 10+int64(day) {
				t.Errorf("since day %d, want after day 10", since)
			}
			s := b.Exchanger(0)
			if _, early, _, ok := s.Course.Reach(0.02e-3, s.FoulingError); !ok || !(early >= 0) {
				t.Errorf("course %+v does not reach its allowance", s.Course)
			}
			return
		}
	}
	t.Error("not warned of")
}

// A flow meter that begins to read 3 % high unbalances the exchanger.
func TestFlowErrorUnbalances(t *testing.T) {
	b := newBench(3)
	b.run(t, 10*dayOfMinutes)
	b.errors.Hot.Flow = 0.03
	for _, w := range b.run(t, 2*dayOfMinutes) {
		if w.Kind == WarnUnbalanced {
			if !(w.Now > 0) || len(w.Causes) == 0 || w.Causes[0].Kind != cause.FlowMeter {
				t.Errorf("%+v", w)
			}
			return
		}
	}
	t.Error("not warned of")
}

// One side that is not measured leaves the other without an expectation, after a while.
func TestOneSideAlone(t *testing.T) {
	b := newBench(4)
	b.run(t, 60)
	for range 40 {
		b.Observe(0, Minute{Start: b.at, Whole: true, Duty: 250e3, Flow: 2, Inlet: 363, Outlet: 333}, 0)
		b.at += nanosecondsPerMinute
	}
	if g := b.Grounds(0); g.Ground != NotExpected || g.Why == "" || g.Verdict != Undecided {
		t.Errorf("grounds %+v", g)
	}
	if n := len(b.exchanges[0].Pairing.Waiting[0]); n > mostWaiting {
		t.Errorf("%d minutes wait, want at most %d", n, mostWaiting)
	}
}

func TestExchangerGoesOnAfterARestart(t *testing.T) {
	whole, cut := newBench(5), newBench(5)
	for _, minutes := range []int{7, 64, 2001, 5} {
		whole.run(t, minutes)
		cut.run(t, minutes)
		var state bytes.Buffer
		if err := gob.NewEncoder(&state).Encode(cut.Save()); err != nil {
			t.Fatal(err)
		}
		var saved Saved
		if err := gob.NewDecoder(&state).Decode(&saved); err != nil {
			t.Fatal(err)
		}
		fresh := newBench(5).Plant
		fresh.Restore(saved)
		cut.Plant = fresh
	}
	want, got := whole.Exchanger(0), cut.Exchanger(0)
	if got.At != want.At || got.Ratio != want.Ratio || got.Fouling != want.Fouling || got.Balance != want.Balance || want.At == 0 {
		t.Errorf("after restarts %+v, want %+v", got, want)
	}
}

func BenchmarkExchangerMinute(b *testing.B) {
	x := newBench(6)
	for b.Loop() {
		x.run(b, 1)
	}
}

// What is expected of a load can be worked again from the state of the last minute.
func TestExpectingExchanger(t *testing.T) {
	b := newBench(6)
	b.run(t, 30)
	for load := range 2 {
		of, minute, ok := b.Expecting(load)
		duty, err := of.Model.Duty(&minute)
		if g := b.Grounds(load); !ok || err != nil || duty != g.Today.Duty || of.Name != "plates" {
			t.Errorf("load %d: %v W by %q (%v, %v), expected %v W", load, duty, of.Name, ok, err, g.Today.Duty)
		}
	}
}
