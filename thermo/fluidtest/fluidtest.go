// Package fluidtest holds the one suite that every fluid has to pass.
package fluidtest

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"heatreeve/thermo"
)

// Run checks that f keeps the contract of [thermo.Fluid] over the whole of its
// range, at states spread over pressures and temperatures:
//
//   - every figure is finite, density is above zero, cp ≥ cv > 0;
//   - h = u + p/ρ, and ∂h/∂T at constant pressure is cp (central difference);
//   - h rises with T;
//   - just beyond each bound of the box, and just outside of the phase, the
//     error is a *[thermo.RangeError] that names the fluid and the bound;
//   - NaN, infinite and negative input is refused;
//   - an evaluation does not allocate;
//   - the uncertainties are fractions below 1 at every state;
//   - where f is a [thermo.Balancer], its balance is that of At;
//   - where f is a [thermo.Wet], Sensible is At within the phase, goes on below the dew
//     point without a step and with ∂h/∂T = cp, and is refused beyond the box;
//   - name, source, phase and molar mass are filled in.
func Run(t *testing.T, f thermo.Fluid) {
	t.Helper()
	s := suite{f: f, states: states(f)}
	if len(s.states) < 50 {
		t.Fatalf("%s: only %d states to check within %+v", f.Name(), len(s.states), f.Bounds())
	}
	for _, c := range checks {
		t.Run(c.name, func(t *testing.T) { c.check(s, t) })
	}
}

var checks = []struct {
	name  string
	check func(suite, report)
}{
	{"description", suite.description},
	{"state", suite.everyState},
	{"rising", suite.rising},
	{"uncertainty", suite.uncertainty},
	{"balance", suite.balance},
	{"sensible", suite.sensible},
	{"box", suite.box},
	{"phase", suite.phase},
	{"nonsense", suite.nonsense},
	{"allocations", suite.allocations},
}

// report is what a check needs of testing.T.
type report interface {
	Helper()
	Errorf(format string, args ...any)
}

type state struct{ T, p float64 }

type suite struct {
	f      thermo.Fluid
	states []state // by pressure, then by rising temperature
}

// fractions of an interval; odd ones, so as not to meet the round temperatures
// where tables have their rows.
var fractions = []float64{1e-4, 0.0731, 0.1577, 0.2713, 0.3891, 0.5147, 0.6379, 0.7523, 0.8779, 0.9461, 1 - 1e-4}

func states(f thermo.Fluid) []state {
	var out []state
	for _, p := range pressures(f.Bounds()) {
		lo, hi := window(f, p)
		if !(lo < hi) {
			continue
		}
		for _, x := range fractions {
			out = append(out, state{lo + x*(hi-lo), p})
		}
	}
	return out
}

// pressures are spread by their logarithm; a range open at 0 starts eight
// decades below its upper end.
func pressures(b thermo.Bounds) []float64 {
	lo := math.Log(max(b.MinP, b.MaxP*1e-8))
	hi := math.Log(b.MaxP)
	var out []float64
	for _, x := range fractions {
		out = append(out, math.Exp(lo+x*(hi-lo)))
	}
	return out
}

// window is where both the box and the phase allow a state at p.
func window(f thermo.Fluid, p float64) (lo, hi float64) {
	b := f.Bounds()
	lo, hi = f.Span(p)
	return max(lo, b.MinT), min(hi, b.MaxT)
}

func (s suite) description(t report) {
	f := s.f
	if f.Name() == "" || f.Source() == "" {
		t.Errorf("name %q, source %q: neither may be empty", f.Name(), f.Source())
	}
	if p := f.Phase(); p < thermo.Liquid || p > thermo.Solid {
		t.Errorf("phase %v is unknown", p)
	}
	if m := f.MolarMass(); !(m >= 0 && m < 1) {
		t.Errorf("molar mass %g kg/mol", m)
	}
}

// uncertainty holds both figures between 0 and 1 at every state: a fluid that is no surer
// knows nothing. Half and more has fat that may be melting.
func (s suite) uncertainty(t report) {
	for _, st := range s.states {
		cp, density := s.f.Uncertainty(st.T, st.p)
		if !(cp >= 0 && cp < 1 && density >= 0 && density < 1) {
			t.Errorf("%g K, %g Pa: standard uncertainties %g of cp and %g of density, as fractions", st.T, st.p, cp, density)
		}
	}
}

// balance compares a fluid's own short form with At.
func (s suite) balance(t report) {
	b, ok := s.f.(thermo.Balancer)
	if !ok {
		return
	}
	for _, st := range s.states {
		p, err1 := s.f.At(st.T, st.p)
		got, err2 := b.Balance(st.T, st.p)
		if err := errors.Join(err1, err2); err != nil {
			t.Errorf("%g K, %g Pa: %v", st.T, st.p, err)
			continue
		}
		scale := math.Abs(p.Enthalpy) + st.p/p.Density
		if math.Abs(got.Enthalpy-p.Enthalpy) > 1e-12*scale || math.Abs(got.Cp/p.Cp-1) > 1e-12 || math.Abs(got.Density/p.Density-1) > 1e-12 {
			t.Errorf("%g K, %g Pa: balance %+v, properties %+v", st.T, st.p, got, p)
		}
	}
}

func (s suite) everyState(t report) {
	for _, st := range s.states {
		p, err := s.f.At(st.T, st.p)
		if err != nil {
			t.Errorf("%g K, %g Pa: %v", st.T, st.p, err)
			continue
		}
		s.sane(t, st, p)
		s.slope(t, st, p)
	}
}

func (s suite) sane(t report, st state, p thermo.Properties) {
	for _, v := range []float64{p.Enthalpy, p.InternalEnergy, p.Cp, p.Cv, p.Density} {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			t.Errorf("%g K, %g Pa: not finite: %+v", st.T, st.p, p)
			return
		}
	}
	if !(p.Density > 0 && p.Cv > 0 && p.Cp >= p.Cv) {
		t.Errorf("%g K, %g Pa: want density > 0 and cp ≥ cv > 0, got %+v", st.T, st.p, p)
	}
	pv := st.p / p.Density
	scale := math.Abs(p.Enthalpy) + math.Abs(p.InternalEnergy) + pv
	if d := p.Enthalpy - p.InternalEnergy - pv; math.Abs(d) > 1e-12*scale {
		t.Errorf("%g K, %g Pa: h − u − p/ρ = %g J/kg of %g", st.T, st.p, d, scale)
	}
}

// slope compares ∂h/∂T with cp. Central differences over 2·10 mK and 2·5 mK,
// extrapolated (Richardson), leave the fifth derivative of h only, which counts
// nowhere, and 1e-7 of cp in rounding; steps of that size still fit beside each
// end of the window.
func (s suite) slope(t report, st state, p thermo.Properties) {
	lo, hi := window(s.f, st.p)
	d := min(0.01, (hi-lo)*9e-5)
	whole, err1 := s.difference(st, d)
	half, err2 := s.difference(st, d/2)
	if err := errors.Join(err1, err2); err != nil {
		t.Errorf("%g K ± %g K, %g Pa: %v", st.T, d, st.p, err)
		return
	}
	got := (4*half - whole) / 3
	if math.Abs(got/p.Cp-1) > 1e-6 {
		t.Errorf("%g K, %g Pa: ∂h/∂T = %.9g, cp = %.9g J/(kg K)", st.T, st.p, got, p.Cp)
	}
}

// difference is the central difference quotient of h over 2d.
func (s suite) difference(st state, d float64) (float64, error) {
	below, err1 := s.f.At(st.T-d, st.p)
	above, err2 := s.f.At(st.T+d, st.p)
	return (above.Enthalpy - below.Enthalpy) / ((st.T + d) - (st.T - d)), errors.Join(err1, err2)
}

func (s suite) rising(t report) {
	last, at := math.Inf(-1), state{}
	for _, st := range s.states {
		p, err := s.f.At(st.T, st.p)
		if err != nil {
			t.Errorf("%g K, %g Pa: %v", st.T, st.p, err)
			continue
		}
		if st.p == at.p && !(p.Enthalpy > last) {
			t.Errorf("%g Pa: h(%g K) = %g is not above h(%g K) = %g J/kg", st.p, st.T, p.Enthalpy, at.T, last)
		}
		last, at = p.Enthalpy, st
	}
}

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

// phase checks the ends of Span that lie within the box.
func (s suite) phase(t report) {
	b := s.f.Bounds()
	for _, p := range pressures(b) {
		lo, hi := s.f.Span(p)
		if lo > b.MinT && lo < b.MaxT {
			s.refusal(t, state{lo * (1 - hair), p})
		}
		if hi > b.MinT && hi < b.MaxT {
			s.refusal(t, state{hi * (1 + hair), p})
		}
	}
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

func (s suite) allocations(t report) {
	st := s.states[len(s.states)/2]
	var sink float64
	n := testing.AllocsPerRun(100, func() {
		p, _ := s.f.At(st.T, st.p)
		lo, _ := s.f.Span(st.p)
		u, _ := s.f.Uncertainty(st.T, st.p)
		sink += p.Enthalpy + lo + u
	})
	if n != 0 {
		t.Errorf("%g allocations for At, Span and Uncertainty, want none", n)
	}
}
