// Package fluidtest holds the one suite that every fluid has to pass, and what the tests of the
// families have in common: tables of figures, answers of outside programs, deviations, timing.
package fluidtest

import (
	"errors"
	"math"
	"testing"

	"heatreeve/thermo"
)

// Run checks that f keeps the contract of [thermo.Fluid] over the whole of its
// range, at states spread over pressures and temperatures:
//
//   - every figure is finite, density is above zero, cp > cv > 0, and cp = cv where the
//     [thermo.PressureLaw] is that of an incompressible fluid;
//   - h = u + p/ρ, and ∂h/∂T at constant pressure is cp (central difference);
//   - h rises with T;
//   - ∂h/∂p at constant temperature is v − T ∂v/∂T, or what its [thermo.PressureLaw] makes
//     of it;
//   - just beyond each bound of the box, and just outside of the phase, the
//     error is a *[thermo.RangeError] that names the fluid and the very bound: of the box, or
//     the end of Span, or the pressure at which the phase ends at that temperature;
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
	{"pressure", suite.pressure},
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
		if !(math.Abs(got.Enthalpy-p.Enthalpy) <= 1e-12*scale) || !(math.Abs(got.Cp/p.Cp-1) <= 1e-12) || !(math.Abs(got.Density/p.Density-1) <= 1e-12) {
			t.Errorf("%g K, %g Pa: balance %+v, properties %+v", st.T, st.p, got, p)
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
