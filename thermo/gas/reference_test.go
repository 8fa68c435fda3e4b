package gas

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/gas/helmholtz"
)

// The best model is the reference equation, to the six digits of the rows.
func TestBestIsReference(t *testing.T) {
	for _, r := range rows(t, "real-gas.csv") {
		s, T, p := r.Text("species"), r.Number("T_K"), r.Number("p_Pa")
		got, err := pure(t, s, Best).At(T, p)
		if err != nil {
			t.Errorf("%s %g K, %g Pa: %v", s, T, p, err)
			continue
		}
		for column, v := range map[string]float64{"rho_kg_per_m3": got.Density, "cp_J_per_kgK": got.Cp, "cv_J_per_kgK": got.Cv} {
			if want := r.Number(column); math.Abs(v/want-1) > 5e-6 {
				t.Errorf("%s %g K, %g Pa: %s = %.7g, want %.7g (%s)", s, T, p, column, v, want, r.Text("eos"))
			}
		}
	}
}

// Which gases have a reference equation, and what the others are told.
func TestReferenceRefuses(t *testing.T) {
	var got []string
	for name, fractions := range everyGas() {
		f, err := New(fractions, Reference)
		if err == nil {
			got = append(got, name)
			continue
		}
		if !strings.Contains(err.Error(), "it has to be one of dry air, H2O, N2") || !strings.Contains(err.Error(), "best, peng-robinson, ideal") {
			t.Errorf("%s: %v, %v", name, f, err)
		}
	}
	slices.Sort(got)
	if want := "Ar C2H6 C3H8 C4H10 CH4 CO CO2 H2 H2O He N2 NH3 O2 dry air"; strings.Join(got, " ") != want {
		t.Errorf("reference equations of %q, want %q", got, want)
	}
}

// All models stand on one zero of enthalpy: the thin gas at 298.15 K.
func TestOneZero(t *testing.T) {
	for name, fractions := range everyGas() {
		for _, model := range []Model{Best, Ideal, PengRobinson} {
			got, err := mustNew(t, fractions, model).At(298.15, 1)
			if err != nil && name == "NO2" {
				continue // pairs
			}
			if err != nil || math.Abs(got.Enthalpy) > 2 {
				t.Errorf("%s, %v: h = %.2f J/kg, want 0, %v", name, model, got.Enthalpy, err)
			}
		}
	}
}

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
			if math.Abs(above.Enthalpy-below.Enthalpy) > 1e-11*scale || math.Abs(above.InternalEnergy-below.InternalEnergy) > 1e-11*scale ||
				math.Abs(above.Density/below.Density-1) > 1e-11 || math.Abs((above.Cp-above.Cv)/(below.Cp-below.Cv)-1) > 1e-8 {
				t.Errorf("%s at %g Pa: %+v below, %+v above", s, p, below, above)
			}
			uCp, _ := f.Uncertainty(f.top*(1+1e-12), p)
			if d := math.Abs(above.Cp/below.Cp - 1); d > 2*uCp {
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
				if dCp > 2*math.Hypot(uCp, vCp) || dDensity > 2*math.Hypot(uDensity, vDensity) {
					t.Errorf("%s %g K, %g Pa: %.3f %% in cp and %.3f %% in density from Peng and Robinson", s, T, p, 100*dCp, 100*dDensity)
				}
				if T > f.top+200 {
					worstCp, worstDensity = max(worstCp, dCp), max(worstDensity, dDensity)
				}
				if slope, capacities := lawsOf(t, f, T, p); slope > 1e-6 || capacities > 1e-5 {
					t.Errorf("%s %g K, %g Pa: dh/dp misses its law by %.2g of v, cp − cv by %.2g of it", s, T, p, slope, capacities)
				}
			}
		}
		t.Logf("%-5s from 200 K above its end at %g K: cp within %.2f %%, density within %.2f %%", s, f.top, 100*worstCp, 100*worstDensity)
		limit := 0.003
		if s == "NH3" {
			limit = 0.009
		}
		if worstCp > limit || worstDensity > 0.011 {
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

// states between the lower end of a fluid's range and 1500 K, at pressures up to 100 bar.
func states(f thermo.Fluid) (out [][2]float64) {
	for _, p := range []float64{1e3, 1e5, 119e3, 3e5, 1e6, 2e6, 3e6, 4e6, 5e6, 6e6, 8e6, 1e7} {
		if p > f.Bounds().MaxP {
			break
		}
		lo, _ := f.Span(p)
		for T := max(lo, minT) + 0.5; T < 1500; T *= 1.03 {
			out = append(out, [2]float64{T, p})
		}
	}
	return out
}

// The simpler models against the reference equations over the whole of the range in which they are
// trusted: within twice the uncertainty.
func TestSimplerModelsAgainstReference(t *testing.T) {
	type limit struct{ cp, density float64 } // largest deviations
	limits := map[Model]struct{ plain, polar limit }{
		Ideal:        {limit{0.043, 0.047}, limit{0.112, 0.027}},
		PengRobinson: {limit{0.073, 0.044}, limit{0.139, 0.016}},
	}
	for _, model := range []Model{Ideal, PengRobinson} {
		for _, s := range referenced() {
			f, ref := pure(t, s, model), pure(t, s, Reference)
			compared, worst, worstCp, worstDensity := 0, 0.0, 0.0, 0.0
			allowed, warmCp, warmDensity := limits[model].plain, 0.0, 0.0
			switch {
			case polar[s]:
				allowed = limits[model].polar
			case s == "CO2" && model == PengRobinson: // its quadrupole
				allowed = limit{0.134, 0.026}
			}
			for _, st := range states(f) {
				T, p := st[0], st[1]
				want, err := ref.At(T, p)
				if err != nil {
					continue // hotter or nearer to the dew point than the equation goes
				}
				got, err := f.At(T, p)
				if err != nil {
					t.Fatal(err)
				}
				compared++
				uCp, uDensity := f.Uncertainty(T, p)
				dCp, dDensity := math.Abs(got.Cp/want.Cp-1), math.Abs(got.Density/want.Density-1)
				worst, worstCp, worstDensity = max(worst, dCp/uCp, dDensity/uDensity), max(worstCp, dCp), max(worstDensity, dDensity)
				if c, ok := f.(*cubic); ok && T >= c.warm {
					warmCp, warmDensity = max(warmCp, dCp), max(warmDensity, dDensity)
				}
				if dCp > 2*uCp || dDensity > 2*uDensity {
					t.Errorf("%v %s %.1f K, %g Pa: off by %.3f %% in cp and %.3f %% in density, twice the uncertainty is %.3f %% and %.3f %%",
						model, s, T, p, 100*dCp, 100*dDensity, 200*uCp, 200*uDensity)
				}
			}
			t.Logf("%-14v %-7s %3d states: cp within %.2f %%, density within %.2f %%, at most %.2f standard uncertainties", model, s, compared, 100*worstCp, 100*worstDensity, worst)
			if compared < 50 {
				t.Errorf("%v %s: %d states compared, want 50 or more", model, s, compared)
			}
			if worstCp > allowed.cp || worstDensity > allowed.density {
				t.Errorf("%v %s: cp within %.2f %%, density within %.2f %%", model, s, 100*worstCp, 100*worstDensity)
			}
			if warmCp > 0.046 || warmDensity > 0.041 {
				t.Errorf("%v %s above 1.3 Tc: cp within %.2f %%, density within %.2f %%", model, s, 100*warmCp, 100*warmDensity)
			}
			t.Logf("above 1.3 Tc: %.2f %%, %.2f %%", 100*warmCp, 100*warmDensity)
		}
	}
}

func TestReferenceKeepsToItsRange(t *testing.T) {
	const hot = 900 // K; carbon monoxide ends at 500 K
	_, err := pure(t, "CO", Reference).At(hot, 1e5)
	var e *thermo.RangeError
	if !errors.As(err, &e) || e.Bound != 500 || !strings.Contains(e.Why, "the model best goes on to 1726.85 °C") {
		t.Errorf("reference: %v", err)
	}
	if _, err = pure(t, "CO", Reference).At(hot, 2e7); !errors.As(err, &e) || strings.Contains(e.Why, "goes on") {
		t.Errorf("reference under pressure: %v", err)
	}
	f := pure(t, "CO", Best)
	if _, err = f.At(hot, 1e5); err != nil {
		t.Errorf("best: %v", err)
	}
	if _, err = f.At(hot, 2e7); !errors.As(err, &e) || e.Bound != 500 || !strings.Contains(e.Why, "only up to 10 MPa") {
		t.Errorf("best under pressure: %v", err)
	}
	if !strings.Contains(f.Source(), "Lemmon, Span") || !strings.Contains(f.Source(), "above 226.85 °C its residuals") {
		t.Errorf("source %q", f.Source())
	}
}

// Duties worked outside of this project with the reference equations: a gas pre-heater at 50 bar, where
// the ideal gas is 14 % low, and carbon dioxide at 20 bar, where it is 9.2 % low. Peng and Robinson come
// within 1 % and 2 %.
func TestDuties(t *testing.T) {
	for _, tt := range []struct {
		gas           string
		m, T1, T2, p  float64 // kg/s, K, K, Pa
		want, simpler float64 // W; tolerance of Peng and Robinson
		source        string
	}{
		{"CH4", 10, 278.15, 313.15, 5e6, 904064.14, 0.01, "Setzmann and Wagner (1991)"},
		{"CO2", 2, 313.15, 393.15, 2e6, 158209.87, 0.02, "Span and Wagner (1996)"},
	} {
		for model, tolerance := range map[Model]float64{Best: 1e-7, PengRobinson: tt.simpler} {
			got, err := thermo.StreamHeat(pure(t, tt.gas, model), tt.m, tt.T1, tt.p, tt.T2, tt.p)
			if err != nil || math.Abs(got/tt.want-1) > tolerance {
				t.Errorf("%s, %v: %.8g W, want %.8g within %g, %v (%s)", tt.gas, model, got, tt.want, tolerance, err, tt.source)
			}
		}
	}
}
