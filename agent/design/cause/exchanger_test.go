package cause

import (
	"fmt"
	"math"
	"reflect"
	"slices"
	"testing"
)

// bench is an exchanger for these tests, in counterflow, by the closed forms of Kays and
// London, Compact Heat Exchangers, with the films of the off-design example in this
// package's neighbour: 1/30 and 1/40 K/kW at 2 and 3 kg/s, wall 0.025 K/kW, exponent 0.8.
const cp = 4180.0

// state is flow, inlet and outlet of the hot side, then of the cold side.
type state [6]float64

func clean(hot, cold float64) float64 {
	return 1 / (math.Pow(hot/2, -0.8)/30e3 + math.Pow(cold/3, -0.8)/40e3 + 0.025e-3)
}

// settled is the state that the inlets and the conductance come to.
func settled(hot, cold, T1, t1, UA float64) state {
	H, C := hot*cp, cold*cp
	least, ratio := min(H, C), min(H, C)/max(H, C)
	n := UA / least
	effectiveness := n / (1 + n)
	if ratio < 1-1e-9 {
		x := math.Exp(-n * (1 - ratio))
		effectiveness = (1 - x) / (1 - ratio*x)
	}
	Q := effectiveness * least * (T1 - t1)
	return state{hot, T1, T1 - Q/H, cold, t1, t1 + Q/C}
}

// figures are the closure, the logarithm of the conductance against clean, and the duty of
// the hot side, by the readings.
func figures(x state) (closure, conductance, duty float64) {
	hot, cold := x[0]*cp*(x[1]-x[2]), x[3]*cp*(x[5]-x[4])
	a, b := x[1]-x[5], x[2]-x[4]
	mean := (a + b) / 2
	if math.Abs(a/b-1) > 1e-6 {
		mean = (a - b) / math.Log(a/b)
	}
	return hot - cold, math.Log((hot + cold) / 2 / mean / clean(x[0], x[3])), hot
}

// instruments are the accuracies of these tests: flows 0.3 %, temperatures 0.05 K, and a
// tenth of that from window to window.
func instruments(x state) (lasting, scatter state) {
	for i := range x {
		lasting[i] = 0.05
		if i%3 == 0 {
			lasting[i] = 0.003 * x[i]
		}
		scatter[i] = lasting[i] / 10
	}
	return lasting, scatter
}

// gathered is the evidence that readings give, with signatures by differences. With before,
// the shifts since then are told too.
func gathered(x state, before *state) Evidence {
	lasting, scatter := instruments(x)
	var e Evidence
	e.Exchanger.Name = "exchanger"
	var uc, ul, sc, sl float64
	six := e.six()
	for i, o := range six {
		*o = Operating{Known: true, Tag: fmt.Sprintf("tag %d", i), Value: x[i], Uncertainty: lasting[i], Scatter: scatter[i], Follows: true}
	}
	e.Signatures(func(x [6]float64) (s Effect, ok bool) {
		s.Closure, s.Conductance, s.Duty = figures(x)
		return s, true
	})
	for i, o := range six {
		uc, ul = math.Hypot(uc, o.Error.Closure*lasting[i]), math.Hypot(ul, o.Error.Conductance*lasting[i])
		sc, sl = math.Hypot(sc, o.Error.Closure*scatter[i]), math.Hypot(sl, o.Error.Conductance*scatter[i])
	}
	c, l, _ := figures(x)
	e.Exchanger.Closure = Estimate{true, c, uc}
	e.Exchanger.Conductance = Estimate{true, l, math.Hypot(ul, 0.02)}
	if before != nil {
		c0, l0, _ := figures(*before)
		e.Exchanger.ClosureShift = Estimate{true, c - c0, math.Sqrt2 * sc}
		e.Exchanger.ConductanceShift = Estimate{true, l - l0, math.Sqrt2 * sl}
	}
	return e
}

// The example that the bench rests on: the table of off-design duties in kW, computed with
// an independent programme, for the states of these tests.
func TestBench(t *testing.T) {
	for _, tt := range []struct{ hot, cold, T1, t1, Rf, UA, Q float64 }{
		{2, 3, 90, 40, 0, 12000, 270860},
		{1, 3, 90, 40, 0, 9256.1, 174540},
		{2, 1.5, 90, 40, 0, 9817.3, 206010},
		{1, 1.5, 80, 40, 0, 7901.1, 121180},
		{2, 3, 90, 40, 0.02e-3, 9677.4, 244750},
	} {
		UA := 1 / (1/clean(tt.hot, tt.cold) + tt.Rf)
		closure, conductance, Q := figures(settled(tt.hot, tt.cold, tt.T1, tt.t1, UA))
		if math.Abs(UA/tt.UA-1) > 1e-5 || math.Abs(Q/tt.Q-1) > 3e-5 || math.Abs(closure) > 1e-6*Q || math.Abs(conductance-math.Log(UA/clean(tt.hot, tt.cold))) > 1e-9 {
			t.Errorf("%+v: UA %.1f, duty %.0f, closure %g, ln %g", tt, UA, Q, closure, conductance)
		}
	}
}

var states = []struct{ hot, cold, T1, t1 float64 }{{2, 3, 90, 40}, {1, 3, 90, 40}, {2, 1.5, 85, 40}, {2, 2.1, 90, 45}, {1.2, 1.5, 80, 40}}

// spoilt returns the readings with a fault in one instrument: 3 % of a flow, 0.5 K.
func spoilt(x state, i int, sign float64) state {
	if i%3 == 0 {
		x[i] *= 1 + 0.03*sign
	} else {
		x[i] += 0.5 * sign
	}
	return x
}

var suspects = [6]Kind{FlowMeter, InletSensor, OutletSensor, FlowMeter, InletSensor, OutletSensor}

// Of each instrument of either side, off by 3 % or 0.5 K either way, at five states of the
// exchanger: with a time before, it comes first. Without, its lasting errors leave it among
// those that are alike.
func TestSingleInstrument(t *testing.T) {
	for _, s := range states {
		before := settled(s.hot, s.cold, s.T1, s.t1, clean(s.hot, s.cold))
		for i := range before {
			for _, sign := range []float64{-1, 1} {
				x := spoilt(before, i, sign)
				tag := fmt.Sprintf("tag %d", i)
				causes := Rank(gathered(x, &before))
				if len(causes) == 0 || causes[0].Kind != suspects[i] || causes[0].Subject != tag {
					t.Errorf("%v, instrument %d %+g: %+v", s, i, sign, causes)
					continue
				}
				size := causes[0].Figures[2].Value
				if want := x[i] - before[i]; math.Abs(size/want-1) > 0.05 {
					t.Errorf("%v, instrument %d: size %g, want %g", s, i, size, want)
				}
				blamed(t, Rank(gathered(x, nil)), suspects[i], tag)
			}
		}
	}
}

// blamed checks that a cause is among the causes, if there are any, and first or alike the
// first.
func blamed(t *testing.T, causes []Cause, kind Kind, tag string) {
	t.Helper()
	if len(causes) == 0 {
		return // within what the instruments allow
	}
	i := slices.IndexFunc(causes, func(c Cause) bool { return c.Kind == kind && c.Subject == tag })
	if i < 0 || i > 0 && !slices.Contains(causes[0].Alike, kind) {
		t.Errorf("%s of %s is not alike the first: %+v", kind, tag, causes)
	}
}

// Fouling that takes a tenth of the conductance comes first at every state, and with a
// time before nothing is alike. Without a fault, nothing is said.
func TestFouledAndClean(t *testing.T) {
	for _, s := range states {
		UA := clean(s.hot, s.cold)
		before := settled(s.hot, s.cold, s.T1, s.t1, UA)
		fouled := settled(s.hot, s.cold, s.T1, s.t1, 0.9*UA)
		causes := Rank(gathered(fouled, &before))
		if len(causes) == 0 || causes[0].Kind != Fouling || causes[0].Subject != "exchanger" || len(causes[0].Alike) > 0 {
			t.Errorf("%v, fouled: %+v", s, causes)
		}
		blamed(t, Rank(gathered(fouled, nil)), Fouling, "exchanger")
		for _, b := range []*state{nil, &before} {
			if causes := Rank(gathered(before, b)); len(causes) > 0 {
				t.Errorf("%v, clean: %+v", s, causes)
			}
		}
	}
}

// One failed closure, with no conductance to set beside it, blames all six alike: Narasimhan
// and Jordache, Data Reconciliation and Gross Error Detection, 2000, of one constraint.
func TestClosureAlone(t *testing.T) {
	s := states[0]
	e := gathered(spoilt(settled(s.hot, s.cold, s.T1, s.t1, clean(s.hot, s.cold)), 0, 1), nil)
	e.Exchanger.Conductance = Estimate{}
	causes := Rank(e)
	if len(causes) != 6 {
		t.Fatalf("%d causes, want 6: %+v", len(causes), causes)
	}
	for _, c := range causes {
		if c.Weight != causes[0].Weight || !slices.Equal(c.Alike, []Kind{FlowMeter, InletSensor, OutletSensor}) {
			t.Errorf("%+v is not alike the others", c)
		}
	}
}

// The conductance alone cannot tell fouling from an instrument; days that show a ramp put
// fouling first, and days that show a step the instruments.
func TestCourseTellsFouling(t *testing.T) {
	s := states[0]
	e := gathered(settled(s.hot, s.cold, s.T1, s.t1, 0.8*clean(s.hot, s.cold)), nil)
	e.Exchanger.Closure = Estimate{}
	for _, tt := range []struct {
		name  string
		shape func(day int) float64
		first Kind
	}{
		{"ramp", func(day int) float64 { return -0.01 * float64(max(0, day-10)) }, Fouling},
		{"step", func(day int) float64 { return -0.2 * float64(min(1, day/10)) }, FlowMeter},
	} {
		e.Exchanger.Days = nil
		for day := range 30 {
			e.Exchanger.Days = append(e.Exchanger.Days, Day{Day: int64(day), Conductance: Estimate{true, tt.shape(day), 0.01}})
		}
		causes := Rank(e)
		if len(causes) == 0 || causes[0].Kind != tt.first {
			t.Errorf("%s: %+v", tt.name, causes)
			continue
		}
		if got := slices.ContainsFunc(causes, func(c Cause) bool { return c.Kind == Fouling }); got != (tt.first == Fouling) {
			t.Errorf("%s: fouling is told: %v", tt.name, got)
		}
	}
}

// A conductance that is 20 % below clean and has been so in each of the days before is told
// against clean: nothing has shifted against these days, and no thousandth of a kelvin is to blame.
func TestFouledAsTheDaysBefore(t *testing.T) {
	s := states[0]
	e := gathered(settled(s.hot, s.cold, s.T1, s.t1, 0.8*clean(s.hot, s.cold)), nil)
	e.Exchanger.Signalled, e.Exchanger.Since = true, 11
	for day := range 12 {
		e.Exchanger.Days = append(e.Exchanger.Days, Day{
			Day: int64(day), Conductance: Estimate{true, e.Exchanger.Conductance.Value + 1e-5*float64(day%3), 1e-5}, Closure: Estimate{true, float64(day % 3), 1},
		})
	}
	causes := Rank(e)
	if len(causes) == 0 || !slices.ContainsFunc(causes, func(c Cause) bool { return c.Kind == Fouling && c.Weight > 0.5 }) {
		t.Errorf("%+v", causes)
	}
	for _, c := range causes {
		if i := slices.IndexFunc(c.Figures, func(f Figure) bool { return f.Name == "size of the fault" }); i >= 0 && c.Figures[i].Unit == "K" && math.Abs(c.Figures[i].Value) < 0.01 {
			t.Errorf("%s", c.Says)
		}
	}
}

// Days that are alike to the watt make any change stand out; an instrument that is off by less than
// it is stated to be sure to is not at fault all the same.
func TestTriflesAreNoFault(t *testing.T) {
	s := states[0]
	e := gathered(settled(s.hot, s.cold, s.T1, s.t1, clean(s.hot, s.cold)), nil)
	e.Exchanger.Signalled, e.Exchanger.Since = true, 11
	for day := range 12 {
		e.Exchanger.Days = append(e.Exchanger.Days, Day{Day: int64(day), Conductance: Estimate{true, 0, 1e-5}, Closure: Estimate{true, 40 * float64(day/11), 1}})
	}
	for _, c := range Rank(e) {
		if slices.Contains([]Kind{FlowMeter, InletSensor, OutletSensor}, c.Kind) {
			t.Errorf("%s: %s", c.Kind, c.Says)
		}
	}
}

// Evidence of the two sides put together tells the same as that of six readings, and has the
// tests and marks of both.
func TestBeside(t *testing.T) {
	s := states[0]
	before := settled(s.hot, s.cold, s.T1, s.t1, clean(s.hot, s.cold))
	whole := gathered(spoilt(before, 4, 1), &before)
	of := func(x [6]float64) (s Effect, ok bool) {
		s.Closure, s.Conductance, s.Duty = figures(x)
		return s, true
	}
	hot := Evidence{Subject: whole.Subject, Flow: whole.Flow, Inlet: whole.Inlet, Outlet: whole.Outlet}
	cold := Evidence{
		Flow: whole.OtherFlow, Inlet: whole.OtherInlet, Outlet: whole.OtherOutlet,
		Marks: []Mark{{Tag: "tag 3", Reason: "stuck"}},
	}
	got, want := Rank(hot.Beside(cold, whole.Exchanger, of)), Rank(whole)
	if len(got) != len(want)+1 || !reflect.DeepEqual(got[:len(want)], want) || got[len(want)].Says != "the flow meter of the other side: stuck" {
		t.Errorf("%+v\nwant %+v and a stuck flow meter", got, want)
	}
	cold.Steadiness = Steadiness{Known: true, Worst: "flow"}
	if causes := Rank(hot.Beside(cold, whole.Exchanger, of)); causes[0].Kind != Unsteady {
		t.Errorf("the other side is not steady: %+v", causes)
	}
}

// What a rank costs: it is made each minute while a warning stands.
func BenchmarkRank(b *testing.B) {
	s := states[0]
	before := settled(s.hot, s.cold, s.T1, s.t1, clean(s.hot, s.cold))
	e := gathered(spoilt(before, 0, 1), &before)
	for day := range 60 {
		e.Exchanger.Days = append(e.Exchanger.Days, Day{Day: int64(day), Conductance: Estimate{true, 0.001 * float64(day%3), 0.01}, Closure: Estimate{true, float64(day % 5), 10}})
	}
	b.ReportAllocs()
	for b.Loop() {
		if len(Rank(e)) == 0 {
			b.Fatal("no cause")
		}
	}
}
