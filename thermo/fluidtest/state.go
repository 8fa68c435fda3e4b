package fluidtest

import (
	"errors"
	"math"

	"heatreeve/thermo"
)

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
	if !(p.Density > 0 && p.Cv > 0) {
		t.Errorf("%g K, %g Pa: want density > 0 and cv > 0, got %+v", st.T, st.p, p)
	}
	if stiff := s.law().Fixed > 0; stiff && p.Cp != p.Cv || !stiff && !(p.Cp > p.Cv) {
		t.Errorf("%g K, %g Pa: want cp > cv, or the same where nothing gives way to pressure, got %+v", st.T, st.p, p)
	}
	pv := st.p / p.Density
	scale := math.Abs(p.Enthalpy) + math.Abs(p.InternalEnergy) + pv
	if d := p.Enthalpy - p.InternalEnergy - pv; !(math.Abs(d) <= 1e-12*scale) {
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
	if !(math.Abs(got/p.Cp-1) <= 1e-6) {
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
