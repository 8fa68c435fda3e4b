package gas

import (
	"errors"
	"math"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/gas/helmholtz"
)

// Where a reference equation ends, h, u, density and cp − cv have no step, at any pressure.
func TestBeyondIsContinuous(t *testing.T) {
	met := 0
	for _, s := range Species() {
		f, ok := pure(t, s, Best).(extended)
		if !ok {
			continue
		}
		met++
		for _, p := range []float64{1, 1e5, 1e6, 1e7} {
			below, err1 := f.At(f.top, p)
			above, err2 := f.At(f.top*(1+1e-12), p)
			if err := errors.Join(err1, err2); err != nil {
				t.Fatal(err)
			}
			scale := f.top * below.Cp
			if !(math.Abs(above.Enthalpy-below.Enthalpy) <= 1e-11*scale) || !(math.Abs(above.InternalEnergy-below.InternalEnergy) <= 1e-11*scale) ||
				!(math.Abs(above.Density/below.Density-1) <= 1e-11) || !(math.Abs((above.Cp-above.Cv)/(below.Cp-below.Cv)-1) <= 1e-8) {
				t.Errorf("%s at %g Pa: %+v below, %+v above", s, p, below, above)
			}
			uCp, _ := f.Uncertainty(f.top*(1+1e-12), p)
			if d := math.Abs(above.Cp/below.Cp - 1); !(d <= 2*uCp) {
				t.Errorf("%s at %g Pa: cp steps by %.2f %%, twice the uncertainty is %.2f %%", s, p, 100*d, 200*uCp)
			}
		}
	}
	if met != 12 {
		t.Errorf("%d gases go on above their reference equation, want 12", met)
	}
}

// Carried on, an equation and that of Peng and Robinson agree within twice the uncertainties of
// the two, and within the figures told; and both keep dh/dp = v − T·dv/dT and cp − cv =
// −T(∂v/∂T)²/(∂v/∂p).
func TestBeyondAgainstPengRobinson(t *testing.T) {
	for _, s := range helmholtz.Formulas() {
		f, other := pure(t, s, Best).(extended), pure(t, s, PengRobinson)
		worstCp, worstDensity := 0.0, 0.0
		for _, p := range []float64{1e5, 1e6, 5e6, 9.9e6} {
			for T := f.top + 1; T < maxT-1; T += 25 {
				got, err1 := f.At(T, p)
				want, err2 := other.At(T, p)
				if err := errors.Join(err1, err2); err != nil {
					t.Fatal(err)
				}
				uCp, uDensity := f.Uncertainty(T, p)
				vCp, vDensity := other.Uncertainty(T, p)
				dCp, dDensity := math.Abs(got.Cp/want.Cp-1), math.Abs(got.Density/want.Density-1)
				if !(dCp <= 2*math.Hypot(uCp, vCp)) || !(dDensity <= 2*math.Hypot(uDensity, vDensity)) {
					t.Errorf("%s %g K, %g Pa: %.3f %% in cp and %.3f %% in density from Peng and Robinson", s, T, p, 100*dCp, 100*dDensity)
				}
				if T > f.top+200 {
					worstCp, worstDensity = max(worstCp, dCp), max(worstDensity, dDensity)
				}
				if slope, capacities := lawsOf(t, f, T, p); !(slope <= 1e-6) || !(capacities <= 1e-5) {
					t.Errorf("%s %g K, %g Pa: dh/dp misses its law by %.2g of v, cp − cv by %.2g of it", s, T, p, slope, capacities)
				}
			}
		}
		t.Logf("%-5s from 200 K above its end at %g K: cp within %.2f %%, density within %.2f %%", s, f.top, 100*worstCp, 100*worstDensity)
		limit := 0.003
		if s == "NH3" {
			limit = 0.009
		}
		if !(worstCp <= limit) || !(worstDensity <= 0.011) {
			t.Errorf("%s: cp within %.2f %%, density within %.2f %%", s, 100*worstCp, 100*worstDensity)
		}
	}
}

// lawsOf returns by how much dh/dp misses v − T·dv/dT, as a part of v, and cp − cv its own law, as
// a part of it.
func lawsOf(t *testing.T, f thermo.Fluid, T, p float64) (slope, capacities float64) {
	t.Helper()
	at := func(T, p float64) thermo.Properties {
		s, err := f.At(T, p)
		if err != nil {
			t.Fatal(err)
		}
		return s
	}
	dT, dp := 1e-4*T, 1e-3*p
	s := at(T, p)
	v := 1 / s.Density
	hot, cold, high, low := at(T+dT, p), at(T-dT, p), at(T, p+dp), at(T, p-dp)
	byT := (1/hot.Density - 1/cold.Density) / (2 * dT)
	byP := (1/high.Density - 1/low.Density) / (2 * dp)
	slope = ((high.Enthalpy-low.Enthalpy)/(2*dp) - (v - T*byT)) / v
	return math.Abs(slope), math.Abs(-T*byT*byT/byP/(s.Cp-s.Cv) - 1)
}
