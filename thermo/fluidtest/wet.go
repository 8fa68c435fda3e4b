package fluidtest

import (
	"errors"
	"math"

	"heatreeve/thermo"
)

// dry stands in for a wet fluid as one without a dew point, so that the other checks
// may run below it.
type dry struct{ thermo.Wet }

func (d dry) Span(float64) (lo, hi float64)              { return 0, math.Inf(1) }
func (d dry) At(T, p float64) (thermo.Properties, error) { return d.Sensible(T, p) }

// sensible holds a wet fluid to the rules of one that does not condense.
func (s suite) sensible(t report) {
	f, ok := s.f.(thermo.Wet)
	if !ok {
		return
	}
	for _, st := range s.states {
		at, err1 := f.At(st.T, st.p)
		got, err2 := f.Sensible(st.T, st.p)
		if err := errors.Join(err1, err2); err != nil || got != at {
			t.Errorf("%g K, %g Pa: sensible %+v, properties %+v, %v", st.T, st.p, got, at, err)
		}
	}
	below := suite{f: dry{f}, states: states(dry{f})}
	below.everyState(t)
	below.rising(t)
	below.box(t)
	below.nonsense(t)
	for _, p := range pressures(f.Bounds()) {
		s.seam(t, f, p)
	}
}

// seam compares a hair above with a hair below the dew point.
func (s suite) seam(t report, f thermo.Wet, p float64) {
	b := f.Bounds()
	dew, _ := f.Span(p)
	if !(dew*(1-hair) > b.MinT && dew*(1+hair) < b.MaxT) {
		return
	}
	below, err1 := f.Sensible(dew*(1-hair), p)
	above, err2 := f.At(dew*(1+hair), p)
	if err := errors.Join(err1, err2); err != nil {
		t.Errorf("about the dew point, %g K at %g Pa: %v", dew, p, err)
		return
	}
	step := above.Enthalpy - below.Enthalpy
	if !(math.Abs(step-2*hair*dew*above.Cp) <= 1e-9*(math.Abs(above.Enthalpy)+dew*above.Cp)) ||
		!(math.Abs(below.Cp/above.Cp-1) <= 1e-6) || !(math.Abs(below.Cv/above.Cv-1) <= 1e-6) || !(math.Abs(below.Density/above.Density-1) <= 1e-6) {
		t.Errorf("dew point, %g K at %g Pa: %+v below, %+v above", dew, p, below, above)
	}
}
