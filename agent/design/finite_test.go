package design

import (
	"bytes"
	"encoding/gob"
	"math"
	"testing"
	"time"

	"heatreeve/agent/design/exchanger"
)

// A window that is not finite does not stay in the sums.
func TestMonitorOutlastsWhatIsNotFinite(t *testing.T) {
	m := make(limits).monitor(10, 1)
	for i := range 200 {
		m.Observe(int64(i), 0.001*float64(i%3-1), 0, 0.001)
	}
	for _, x := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		m.Observe(200, x, 0, 0.001)
		m.Observe(200, 0, math.Abs(x), 0.001)
		m.Observe(200, 0, 0, math.Abs(x))
	}
	for i := range 200 {
		m.Observe(int64(201+i), -0.02, 0, 0.001)
	}
	if m.Side != -1 {
		t.Errorf("a shift after windows that are not finite is not told: %+v", m)
	}
}

// Where the inlets are 5 mK apart the expected duty is not known: no holding by an uncertainty
// that is no number.
func TestInletsAsWarmAsEachOther(t *testing.T) {
	x := newExchange(Exchanger{Name: "plates", Model: clean, Lasting: 10 * time.Minute}, make(limits))
	hot := Minute{Whole: true, Duty: 20, Flow: 2, Inlet: 313.005, Outlet: 313.003, FlowError: 0.01, InletError: 0.1, OutletError: 0.1}
	cold := Minute{Whole: true, Duty: 20, Flow: 3, Inlet: 313, Outlet: 313.001, FlowError: 0.01, InletError: 0.1, OutletError: 0.1}
	for _, e := range x.expected([2]*Minute{&hot, &cold}) {
		if e.Known || e.Why == "" {
			t.Errorf("expected %+v, want it not to be known", e)
		}
	}
}

// A side with ends as warm as each other leaves the closure's uncertainty a number.
func TestClosureOfASideWithoutRise(t *testing.T) {
	s := exchanger.State{
		Hot:  exchanger.Stream{Flow: 2, Inlet: 330, Outlet: 330, CpError: 0.001},
		Cold: exchanger.Stream{Flow: 3, Cp: 4180, Inlet: 313, Outlet: 315, FlowError: 0.03, InletError: 0.1, OutletError: 0.1},
	}
	slopes := clean.Slopes(&s, 0.5, 0)
	if u := s.Errors(&slopes).Closure; !(u > 0) {
		t.Errorf("uncertainty of the closure %v, want a number", u)
	}
}

// The course of fouling is restored with what its interval is worked from.
func TestCourseIsRestored(t *testing.T) {
	of := Exchanger{Name: "plates", Model: clean, Lasting: 10 * time.Minute}
	was := newExchange(of, make(limits))
	for day := range int64(20) {
		was.Trend.Observe(day, 1e-6*float64(day)+1e-7*float64(day%3))
	}
	was.Last.Course = was.Trend.Course()
	var buf bytes.Buffer
	if err := gob.NewEncoder(&buf).Encode(was); err != nil {
		t.Fatal(err)
	}
	var saved Exchange
	if err := gob.NewDecoder(&buf).Decode(&saved); err != nil {
		t.Fatal(err)
	}
	x := newExchange(of, make(limits))
	if x.restore(saved); x.Last.Course != was.Last.Course {
		t.Errorf("course %+v, want %+v", x.Last.Course, was.Last.Course)
	}
}
