package fluidtest

import (
	"errors"
	"math"

	"heatreeve/thermo"
)

// pressure compares ∂h/∂p at constant temperature with what the law of the fluid says of it,
// by central differences in pressure and in temperature, all over the inner states: at the
// outermost ones a neighbour may lie beyond an end.
func (s suite) pressure(t report) {
	law := s.law()
	for _, st := range innerStates(s.f) {
		got, noise, err1 := s.byPressure(st)
		want, v, err2 := s.byLaw(law, st)
		if err := errors.Join(err1, err2); err != nil {
			t.Errorf("beside %g K, %g Pa: %v", st.T, st.p, err)
			continue
		}
		if !(math.Abs(got-want) <= (law.Within+closeness)*v+noise) {
			t.Errorf("%g K, %g Pa: ∂h/∂p = %.8g m³/kg, by its law %.8g, of v = %.6g", st.T, st.p, got, want, v)
		}
		if d := s.squeeze(st); law.Fixed > 0 && d != 0 {
			t.Errorf("%g K, %g Pa: the density of an incompressible fluid changes by %g of it", st.T, st.p, d)
		}
	}
}

// law is that of a plain fluid where it names none.
func (s suite) law() thermo.PressureLaw {
	if c, ok := s.f.(thermo.Compressed); ok {
		return c.PressureLaw()
	}
	return thermo.PressureLaw{}
}

// closeness is what the differences leave open, as a fraction of v.
const closeness = 1e-5

func innerStates(f thermo.Fluid) []state {
	ps := pressures(f.Bounds())
	var out []state
	for _, p := range ps[1 : len(ps)-1] {
		lo, hi := window(f, p)
		if !(lo < hi) {
			continue
		}
		for _, x := range fractions[1 : len(fractions)-1] {
			out = append(out, state{lo + x*(hi-lo), p})
		}
	}
	return out
}

// byPressure is ∂h/∂p in m³/kg, and what rounding leaves open of it.
func (s suite) byPressure(st state) (slope, noise float64, err error) {
	const step = 4e-4 // of the pressure
	var faults []error
	h := func(x float64) float64 {
		p, err := s.f.At(st.T, st.p*(1+x))
		faults = append(faults, err)
		noise = max(noise, math.Abs(p.Enthalpy))
		return p.Enthalpy
	}
	whole, half := h(step)-h(-step), h(step/2)-h(-step/2)
	slope = (8*half - whole) / 3 / (2 * step * st.p)
	return slope, 1e-14 * noise / (2 * step * st.p), errors.Join(faults...)
}

// byLaw is what ∂h/∂p has to be, and v at that state.
func (s suite) byLaw(law thermo.PressureLaw, st state) (slope, v float64, err error) {
	at := st
	if law.Fixed > 0 { // where it does not boil
		ps := pressures(s.f.Bounds())
		at = state{law.Fixed, ps[len(ps)-1]}
	}
	const step = 0.01 // K
	var faults []error
	volume := func(dT float64) float64 {
		p, err := s.f.At(at.T+dT, at.p)
		faults = append(faults, err)
		return 1 / p.Density
	}
	v = volume(0)
	if !law.Ideal {
		whole, half := volume(step)-volume(-step), volume(step/2)-volume(-step/2)
		slope = v - at.T*(8*half-whole)/3/(2*step)
	}
	return slope, v, errors.Join(faults...)
}

// squeeze is the relative change of density over a step of pressure.
func (s suite) squeeze(st state) float64 {
	a, err1 := s.f.At(st.T, st.p)
	b, err2 := s.f.At(st.T, st.p*(1+1e-3))
	if err1 != nil || err2 != nil {
		return math.NaN()
	}
	return b.Density/a.Density - 1
}
