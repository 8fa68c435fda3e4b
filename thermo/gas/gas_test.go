package gas

import (
	"errors"
	"maps"
	"math"
	"os"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
	"heatreeve/thermo/water"
)

// flue gas of natural gas, as in the worked examples of package thermo.
var flue = map[string]float64{"N2": 0.712, "CO2": 0.086, "H2O": 0.172, "O2": 0.030}

func mustNew(t testing.TB, fractions map[string]float64, model Model) thermo.Fluid {
	t.Helper()
	return fluidtest.Must(New(fractions, model))(t)
}

// mixtures are those that every model of mixtures is tried on.
var mixtures = map[string]map[string]float64{
	"dry air":      {"air": 1},
	"flue gas":     flue,
	"humid air":    {"N2": 0.775, "O2": 0.205, "H2O": 0.02},
	"natural gas":  {"CH4": 0.89, "C2H6": 0.06, "C3H8": 0.02, "C4H10": 0.005, "C5H12": 0.001, "N2": 0.014, "CO2": 0.01},
	"biogas":       {"CH4": 0.6, "CO2": 0.38, "N2": 0.012, "O2": 0.005, "H2S": 0.003},
	"syngas":       {"H2": 0.48, "CO": 0.31, "CO2": 0.12, "CH4": 0.04, "N2": 0.05},
	"loop gas":     {"H2": 0.62, "N2": 0.2, "NH3": 0.14, "CH4": 0.03, "Ar": 0.01},
	"diving gas":   {"He": 0.45, "O2": 0.2, "N2": 0.35},
	"burner gas":   {"SO2": 0.11, "O2": 0.09, "N2": 0.8},
	"nitrous gas":  {"NO": 0.06, "NO2": 0.03, "N2O": 0.01, "N2": 0.8, "H2O": 0.1},
	"wet hydrogen": {"H2": 0.6, "H2O": 0.4},
}

// everyGas is each species by itself, and the mixtures.
func everyGas() map[string]map[string]float64 {
	out := maps.Clone(mixtures)
	for _, s := range Species() {
		out[s] = map[string]float64{s: 1}
	}
	return out
}

func TestConformance(t *testing.T) {
	for name, fractions := range everyGas() {
		for _, model := range []Model{Best, Ideal, PengRobinson, Reference} {
			f, err := New(fractions, model)
			if err != nil && model == Reference {
				continue // TestReferenceRefuses says for which
			}
			if err != nil {
				t.Fatal(err)
			}
			t.Run(name+" "+model.String(), func(t *testing.T) { fluidtest.Run(t, f) })
		}
	}
}

func rows(t *testing.T, name string) []fluidtest.Row {
	t.Helper()
	return fluidtest.Rows(t, os.DirFS("testdata"), name)
}

func pure(t testing.TB, species string, model Model) thermo.Fluid {
	t.Helper()
	return mustNew(t, map[string]float64{species: 1}, model)
}

// ideal is cp in J/(mol K) and the enthalpy from 298.15 K in J/mol, without
// regard to condensation: the tables hold the ideal gas far below its dew point.
func ideal(t *testing.T, species string, T float64) (cp, h float64) {
	cp, h = pure(t, species, Ideal).(*mixture).at(T)
	return thermo.R * cp, thermo.R * T * h
}

// TestAgainstTables compares with NIST-JANAF, TRC and reference equations; each
// row names its source. The tolerances are the largest deviations measured, in
// percent, rounded up. Below them lies the rounding of the tables: 0.0005
// J/(mol K) and 0.6 J/mol (half a joule, and the gas constant of their time).
//
// Where more than 1 % parts us from JANAF, we stay with the NASA coefficients. CH4: JANAF's
// methane is of 1961 and falls behind Setzmann and Wagner (1991) too, by 0.5 % at 600 K. NO2 and
// N2O: JANAF's tables of 1964 leave out or shorten the anharmonic terms which Gurvich, whom NASA
// follows, carries (from memory). All three are worst at 1500 K. What is right at 1500 K is not
// settled by that: the deviation stays in the uncertainty, see fits.
func TestAgainstTables(t *testing.T) {
	type percent struct{ cp, h float64 }
	tolerance := map[string]struct{ cool, hot percent }{ // up to 1000 K and up to 1500 K
		"N2":      {percent{0.005, 0.002}, percent{0.005, 0.002}},
		"O2":      {percent{0.035, 0.018}, percent{0.035, 0.034}},
		"Ar":      {percent{0, 0}, percent{0, 0}},
		"CO2":     {percent{0.022, 0.028}, percent{0.022, 0.028}},
		"CO":      {percent{0.016, 0.011}, percent{0.016, 0.011}},
		"H2O":     {percent{0.055, 0.011}, percent{0.49, 0.115}},
		"H2":      {percent{0.043, 0.025}, percent{0.043, 0.025}},
		"He":      {percent{0, 0}, percent{0, 0}},
		"CH4":     {percent{2.62, 1.33}, percent{4.98, 2.61}},
		"C2H6":    {percent{0.3, 0.23}, percent{0.3, 0.23}},
		"C3H8":    {percent{0.49, 0.4}, percent{0.49, 0.4}},
		"C4H10":   {percent{0.47, 0.24}, percent{0.47, 0.24}},
		"C5H12":   {percent{0.09, 0.03}, percent{0.09, 0.03}},
		"C2H4":    {percent{0.09, 0.05}, percent{0.09, 0.05}},
		"NH3":     {percent{0.44, 0.21}, percent{0.92, 0.46}},
		"SO2":     {percent{0.36, 0.24}, percent{0.49, 0.33}},
		"H2S":     {percent{0.46, 0.35}, percent{0.72, 0.46}},
		"NO":      {percent{0.111, 0.074}, percent{0.111, 0.074}},
		"NO2":     {percent{1.57, 1.21}, percent{2.15, 1.5}},
		"N2O":     {percent{0.67, 0.29}, percent{1.31, 0.61}},
		"HCl":     {percent{0.034, 0.011}, percent{0.127, 0.036}},
		"Cl2":     {percent{0.011, 0.002}, percent{0.164, 0.005}},
		"dry-air": {percent{0.013, 0.003}, percent{0.013, 0.006}},
	}
	seen, worstCp, worstH := map[string]int{}, map[string]float64{}, map[string]float64{}
	for _, r := range rows(t, "ideal-gas.csv") {
		s, T := r.Text("species"), r.Number("T_K")
		seen[s]++
		cp, h := ideal(t, s, T)
		wantCp, wantH := r.Number("cp_J_per_molK"), r.Number("h_minus_h298_J_per_mol")
		dCp := max(0, math.Abs(cp-wantCp)-0.0005) / wantCp * 100
		dH := max(0, math.Abs(h-wantH)-0.6) / max(1, math.Abs(wantH)) * 100
		worstCp[s], worstH[s] = max(worstCp[s], dCp), max(worstH[s], dH)
		limit := tolerance[s].hot
		if T <= seam {
			limit = tolerance[s].cool
		}
		if dCp > limit.cp {
			t.Errorf("%s %g K: cp = %.4f, want %.4f J/(mol K) (%.3f %%; %s)", s, T, cp, wantCp, dCp, r.Text("source"))
		}
		if dH > limit.h {
			t.Errorf("%s %g K: h = %.1f, want %.1f J/mol (%.3f %%; %s)", s, T, h, wantH, dH, r.Text("source"))
		}
		if d := 100 * (cp/wantCp - 1); math.Abs(d-r.Number("deviation_percent")) > 0.0025 {
			t.Errorf("%s %g K: cp is off by %.4f %%, found elsewhere %s %%", s, T, d, r.Text("deviation_percent"))
		}
	}
	for _, s := range append(Species(), "dry-air") {
		if seen[s] < 8 {
			t.Errorf("%s: compared %d rows, want 8 or more", s, seen[s])
		}
		t.Logf("%-7s %2d rows: worst cp %.3f %%, h %.4f %%", s, seen[s], worstCp[s], worstH[s])
	}
}

// TestTrust holds the limits of pressure to the reference equations: no state
// up to the limit and at 300 K or above deviates by more than is accepted.
func TestTrust(t *testing.T) {
	compared := 0
	for _, r := range rows(t, "real-gas.csv") {
		s, T, p := r.Text("species"), r.Number("T_K"), r.Number("p_Pa")
		f := pure(t, s, Ideal)
		got, err := f.At(T, p)
		if p > f.Bounds().MaxP {
			if err == nil {
				t.Errorf("%s %g K, %g Pa: accepted above %g Pa", s, T, p, f.Bounds().MaxP)
			}
			continue
		}
		compared++
		cpLimit, rhoLimit := maxCpDeviation, maxDensityDeviation
		if f.Bounds().MaxP == leastMaxP { // too far from ideal for the usual limit
			cpLimit, rhoLimit = 0.034, 0.016
		}
		if d := got.Cp/r.Number("cp_J_per_kgK") - 1; err != nil || math.Abs(d) > cpLimit {
			t.Errorf("%s %g K, %g Pa: cp is off by %.2f %%, %v (%s)", s, T, p, 100*d, err, r.Text("eos"))
		}
		if d := got.Density/r.Number("rho_kg_per_m3") - 1; math.Abs(d) > rhoLimit {
			t.Errorf("%s %g K, %g Pa: density is off by %.2f %% (%s)", s, T, p, 100*d, r.Text("eos"))
		}
		uCp, uDensity := f.Uncertainty(T, p)
		dCp, dDensity := math.Abs(got.Cp/r.Number("cp_J_per_kgK")-1), math.Abs(got.Density/r.Number("rho_kg_per_m3")-1)
		if dCp > 2*uCp || dDensity > 2*uDensity {
			t.Errorf("%s %g K, %g Pa: off by %.3f %% in cp and %.3f %% in density, twice the uncertainty is %.3f %% and %.3f %% (%s)",
				s, T, p, 100*dCp, 100*dDensity, 200*uCp, 200*uDensity, r.Text("eos"))
		}
	}
	if compared < 40 {
		t.Errorf("compared %d states, want 40 or more", compared)
	}
}

// Water vapour, which the table of real gases leaves out, against IAPWS-IF97.
func TestTrustOfWaterVapour(t *testing.T) {
	const T, p = 400, 1e5
	real, err1 := water.Steam().At(T, p)
	ideal, err2 := pure(t, "H2O", Ideal).At(T, p)
	if err := errors.Join(err1, err2); err != nil {
		t.Fatal(err)
	}
	k := trusts["H2O"]
	if d := 1 - ideal.Cp/real.Cp; math.Abs(d-k.cp*p) > 0.001 {
		t.Errorf("cp is %.4f low, table says %.4f", d, k.cp*p)
	}
	if d := 1 - ideal.Density/real.Density; math.Abs(d-k.density*p) > 0.001 {
		t.Errorf("density is %.4f low, table says %.4f", d, k.density*p)
	}
}

// The thin gas against IAPWS-IF97, region 5 above 1073 K: ever farther below it, 1.14 % at 2000 K. A
// deviation is at most the half-width √3 u of the stated uncertainty.
func TestHotWaterVapour(t *testing.T) {
	worst := 0.0
	for T := 400.0; T <= maxT; T += 25 {
		const p = 1e4 // the difference in cp between this and no pressure is in the uncertainty
		got, err1 := pure(t, "H2O", Ideal).At(T, p)
		want, err2 := water.Steam().At(T, p)
		if err := errors.Join(err1, err2); err != nil {
			t.Fatal(err)
		}
		u, _ := pure(t, "H2O", Ideal).Uncertainty(T, p)
		d := got.Cp/want.Cp - 1
		if worst = max(worst, math.Abs(d)); math.Abs(d) > math.Sqrt(3)*u {
			t.Errorf("%g K: cp is off by %.3f %%, uncertainty %.3f %%", T, 100*d, 100*u)
		}
	}
	t.Logf("worst %.2f %%", 100*worst)
	if worst < 0.005 {
		t.Errorf("worst deviation %g, expected about 1 %%", worst)
	}
}

func TestEveryGasHasItsTrust(t *testing.T) {
	for _, s := range table {
		if k := trusts[s.formula]; !(k.cp > 0 && k.density > 0 && k.cold >= k.hot && k.hot >= 2) {
			t.Errorf("%s: %+v", s.formula, k)
		}
		if k := fits[s.formula]; !(k.cool > 0 && k.hot >= k.cool && k.cold >= 0) {
			t.Errorf("%s: %+v", s.formula, k)
		}
		if k := critical[s.formula]; !(k.T > 0 && k.p > 0) {
			t.Errorf("%s: %+v", s.formula, k)
		}
	}
	if n := len(table); len(trusts) != n || len(fits) != n || len(critical) != n {
		t.Errorf("%d gases, %d entries of trust, %d fits, %d critical points", n, len(trusts), len(fits), len(critical))
	}
}

// The deviations by corresponding states, worked again. They come near those of the reference
// equations as well, except for polar ammonia and for the smallest molecules.
func TestTrustByCorrespondingStates(t *testing.T) {
	near := map[string]float64{"N2": 0.15, "O2": 0.15, "Ar": 0.15, "CO2": 0.15, "CO": 0.15, "CH4": 0.15, "C2H6": 0.15, "C3H8": 0.15}
	for _, s := range table {
		k, c := trusts[s.formula], critical[s.formula]
		switch s.formula {
		case "H2O", "H2", "He", "NH3":
			continue
		}
		const T = 300
		B, second := c.virial(T)
		cp0, _ := s.low.at(T)
		tolerance := max(near[s.formula], 0.02)
		if d := -T * second / (thermo.R * cp0); math.Abs(k.cp/d-1) > tolerance {
			t.Errorf("%s: cp deviates by %g per Pa, corresponding states give %g", s.formula, k.cp, d)
		}
		if d := math.Abs(B) / (thermo.R * T); math.Abs(k.density-d) > tolerance*d+0.0005e-6 {
			t.Errorf("%s: density deviates by %g per Pa, corresponding states give %g", s.formula, k.density, d)
		}
	}
}
