package fluidtest

import (
	"errors"
	"fmt"
	"math"

	"heatreeve/thermo"
)

// hair is the relative distance at which a state counts as just beyond a bound.
const hair = 1e-9

func (s suite) box(t report) {
	b := s.f.Bounds()
	mid := s.states[len(s.states)/2]
	for _, c := range []struct {
		st       state
		quantity string
		bound    float64
		below    bool
	}{
		{state{b.MinT * (1 - hair), mid.p}, "temperature", b.MinT, true},
		{state{b.MaxT * (1 + hair), mid.p}, "temperature", b.MaxT, false},
		{state{mid.T, beneath(b.MinP)}, "pressure", b.MinP, true},
		{state{mid.T, b.MaxP * (1 + hair)}, "pressure", b.MaxP, false},
	} {
		e := s.refusal(t, c.st)
		if e == nil {
			continue
		}
		if e.Quantity != c.quantity || e.Bound != c.bound || e.Below != c.below {
			t.Errorf("%g K, %g Pa: got %+v; want %s, bound %g, below %v", c.st.T, c.st.p, *e, c.quantity, c.bound, c.below)
		}
	}
}

func beneath(p float64) float64 {
	if p == 0 {
		return 0 // a range open at 0: the bound itself is outside
	}
	return p * (1 - hair)
}

// phase checks the ends of Span that lie within the box: the error names the very end, or,
// where it is put as a pressure, the one at which the phase ends at that temperature.
func (s suite) phase(t report) {
	b := s.f.Bounds()
	for _, p := range pressures(b) {
		lo, hi := s.f.Span(p)
		if T := lo * (1 - hair); T >= b.MinT && T < b.MaxT {
			s.end(t, state{T, p}, true)
		}
		if T := hi * (1 + hair); T > b.MinT && T <= b.MaxT {
			s.end(t, state{T, p}, false)
		}
	}
}

// end checks the error of a state just beyond the lower or the upper end of Span.
func (s suite) end(t report, st state, lower bool) {
	e := s.refusal(t, st)
	if e == nil {
		return
	}
	lo, hi := s.f.Span(st.p)
	if !(lo < hi) { // beyond both
		if e.Quantity != "temperature" || !(e.Below && e.Bound == lo || !e.Below && e.Bound == hi) {
			t.Errorf("%.12g K, %.12g Pa: got %+v; want the temperature of either end, %g K or %g K", st.T, st.p, *e, lo, hi)
		}
		return
	}
	want := hi
	if lower {
		want = lo
	}
	if e.Quantity == "temperature" && e.Bound == want && e.Below == lower || s.endsAt(e, st.T) {
		return
	}
	t.Errorf("%.12g K, %.12g Pa: got %+v; want temperature, bound %g, below %v, or the pressure to it", st.T, st.p, *e, want, lower)
}

// endsAt tells whether an error names the pressure at which the phase ends at T: that is
// within Span a hair to one side of it and beyond it a hair to the other.
func (s suite) endsAt(e *thermo.RangeError, T float64) bool {
	above, below := s.within(T, e.Bound*(1+hair)), s.within(T, e.Bound*(1-hair))
	return e.Quantity == "pressure" && above == e.Below && below != e.Below
}

func (s suite) within(T, p float64) bool {
	lo, hi := s.f.Span(p)
	return lo <= T && T <= hi
}

// refusal returns the RangeError for a state that must be refused, after
// checking that it is well formed, or nil when it is not.
func (s suite) refusal(t report, st state) *thermo.RangeError {
	t.Helper()
	where := fmt.Sprintf("%.12g K, %.12g Pa", st.T, st.p)
	p, err := s.f.At(st.T, st.p)
	var e *thermo.RangeError
	if !errors.As(err, &e) {
		t.Errorf("%s: got %+v, error %v; want a *thermo.RangeError", where, p, err)
		return nil
	}
	value := map[string]float64{"temperature": st.T, "pressure": st.p}
	v, known := value[e.Quantity]
	if !known || e.Fluid != s.f.Name() || e.Why == "" || e.Value != v {
		t.Errorf("%s: ill-formed %+v", where, *e)
	}
	if beyond := e.Value > e.Bound; e.Value != e.Bound && beyond == e.Below {
		t.Errorf("%s: the error puts %g on the wrong side of %g", where, e.Value, e.Bound)
	}
	return e
}

func (s suite) nonsense(t report) {
	good := s.states[len(s.states)/2]
	for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1), -1, 0} {
		for _, st := range []state{{bad, good.p}, {good.T, bad}, {bad, bad}} {
			p, err := s.f.At(st.T, st.p)
			var e *thermo.RangeError
			if !errors.As(err, &e) || p != (thermo.Properties{}) {
				t.Errorf("%g K, %g Pa: got %+v, error %v; want nothing and a *thermo.RangeError", st.T, st.p, p, err)
			}
		}
	}
}
