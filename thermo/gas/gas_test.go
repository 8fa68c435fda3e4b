package gas

import (
	"errors"
	"maps"
	"math"
	"os"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
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

// lengths are the rows of each table.
var lengths = map[string]int{"ideal-gas.csv": 234, "real-gas.csv": 162, "humid-air.csv": 72}

func rows(t *testing.T, name string) []fluidtest.Row {
	t.Helper()
	out := fluidtest.Rows(t, os.DirFS("testdata"), name)
	if n := lengths[name]; len(out) != n {
		t.Fatalf("%s: %d rows, want %d", name, len(out), n)
	}
	return out
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

// agreesWithAt tells whether the fluid accepts T in K at 1 Pa, and holds what it then gives to cp
// and the enthalpy of the ideal gas, in J/mol.
func agreesWithAt(t *testing.T, species string, T, cp, h float64) bool {
	t.Helper()
	f := pure(t, species, Ideal)
	got, err := f.At(T, 1)
	if e := new(thermo.RangeError); errors.As(err, &e) {
		return false
	}
	M := f.MolarMass()
	if !(math.Abs(M*got.Cp/cp-1) <= 1e-14 && math.Abs(M*got.Enthalpy-h) <= 1e-14*(math.Abs(h)+thermo.R*T)) || err != nil {
		t.Errorf("%s %g K: by At %+v, %v; want cp = %.9g J/(mol K), h = %.9g J/mol", species, T, got, err, cp, h)
	}
	return true
}

type percent struct{ cp, h float64 }

// tolerances are the largest deviations from the tables, up to 1000 K and up to 1500 K.
var tolerances = map[string]struct{ cool, hot percent }{
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
	seen, worstCp, worstH := map[string]int{}, map[string]float64{}, map[string]float64{}
	accepted := 0
	for _, r := range rows(t, "ideal-gas.csv") {
		s, T := r.Text("species"), r.Number("T_K")
		seen[s]++
		cp, h := ideal(t, s, T)
		if agreesWithAt(t, s, T, cp, h) {
			accepted++
		}
		wantCp, wantH := r.Number("cp_J_per_molK"), r.Number("h_minus_h298_J_per_mol")
		dCp := max(0, math.Abs(cp-wantCp)-0.0005) / wantCp * 100
		dH := max(0, math.Abs(h-wantH)-0.6) / max(1, math.Abs(wantH)) * 100
		worstCp[s], worstH[s] = max(worstCp[s], dCp), max(worstH[s], dH)
		limit := tolerances[s].hot
		if T <= seam {
			limit = tolerances[s].cool
		}
		if !(dCp <= limit.cp) {
			t.Errorf("%s %g K: cp = %.4f, want %.4f J/(mol K) (%.3f %%; %s)", s, T, cp, wantCp, dCp, r.Text("source"))
		}
		if !(dH <= limit.h) {
			t.Errorf("%s %g K: h = %.1f, want %.1f J/mol (%.3f %%; %s)", s, T, h, wantH, dH, r.Text("source"))
		}
		if d := 100 * (cp/wantCp - 1); !(math.Abs(d-r.Number("deviation_percent")) <= 0.0025) {
			t.Errorf("%s %g K: cp is off by %.4f %%, found elsewhere %s %%", s, T, d, r.Text("deviation_percent"))
		}
	}
	t.Logf("%d of the rows by At", accepted)
	if accepted != 231 { // NO2 pairs at two, water vapour freezes at one
		t.Errorf("%d of the rows by At, want 231", accepted)
	}
	for _, s := range append(Species(), "dry-air") {
		if seen[s] < 8 {
			t.Errorf("%s: compared %d rows, want 8 or more", s, seen[s])
		}
		t.Logf("%-7s %2d rows: worst cp %.3f %%, h %.4f %%", s, seen[s], worstCp[s], worstH[s])
	}
}
