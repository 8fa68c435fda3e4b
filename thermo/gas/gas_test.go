package gas

import (
	"encoding/csv"
	"errors"
	"math"
	"os"
	"strconv"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
	"heatreeve/thermo/water"
)

// flue gas of natural gas, as in the worked examples of package thermo.
var flue = map[string]float64{"N2": 0.712, "CO2": 0.086, "H2O": 0.172, "O2": 0.030}

func mustNew(t testing.TB, fractions map[string]float64) thermo.Fluid {
	t.Helper()
	f, err := New(fractions)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func TestConformance(t *testing.T) {
	for _, s := range Species() {
		t.Run(s, func(t *testing.T) { fluidtest.Run(t, mustNew(t, map[string]float64{s: 1})) })
	}
	t.Run("dry air", func(t *testing.T) { fluidtest.Run(t, DryAir()) })
	t.Run("flue gas", func(t *testing.T) { fluidtest.Run(t, mustNew(t, flue)) })
	t.Run("humid air", func(t *testing.T) {
		fluidtest.Run(t, mustNew(t, map[string]float64{"N2": 0.775, "O2": 0.205, "H2O": 0.02}))
	})
}

// row of a table in testdata, by column name.
type row map[string]string

func rows(t *testing.T, name string) []row {
	t.Helper()
	file, err := os.Open("testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	r := csv.NewReader(file)
	r.Comment = '#'
	lines, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []row
	for _, line := range lines[1:] {
		m := row{}
		for k, head := range lines[0] {
			m[head] = line[k]
		}
		out = append(out, m)
	}
	return out
}

func (r row) number(t *testing.T, column string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(r[column], 64)
	if err != nil {
		t.Fatalf("%v: column %q: %v", r, column, err)
	}
	return v
}

func named(t *testing.T, species string) thermo.Fluid {
	if species == "dry-air" {
		return DryAir()
	}
	return mustNew(t, map[string]float64{species: 1})
}

// ideal is cp in J/(mol K) and the enthalpy from 298.15 K in J/mol, without
// regard to condensation: the tables hold the ideal gas far below its dew point.
func ideal(f thermo.Fluid, T float64) (cp, h float64) {
	m := f.(*mixture)
	part := &m.low
	if T > seam {
		part = &m.high
	}
	cp, h = part.at(T)
	return thermo.R * cp, thermo.R * T * h
}

// TestAgainstTables compares with NIST-JANAF, TRC and reference equations; each
// row names its source. The tolerances are the largest deviations measured, in
// percent, rounded up. Below them lies the rounding of the tables: 0.0005
// J/(mol K) and 0.6 J/mol (half a joule, and the gas constant of their time).
func TestAgainstTables(t *testing.T) {
	tolerance := map[string]struct{ cp, h float64 }{
		"N2":      {0.005, 0.002},
		"O2":      {0.035, 0.035},
		"Ar":      {0, 0},
		"CO2":     {0.022, 0.032},
		"CO":      {0.016, 0.012},
		"H2O":     {0.49, 0.12}, // worst at 1500 K
		"H2":      {0.043, 0.03},
		"He":      {0, 0},
		"CH4":     {4.98, 2.7}, // worst at 1500 K, against the older table of JANAF
		"C2H6":    {0.30, 0.23},
		"C3H8":    {0.49, 0.40},
		"NH3":     {0.92, 0.46}, // worst at 1500 K
		"SO2":     {0.49, 0.33}, // worst at 1500 K
		"dry-air": {0.013, 0.007},
	}
	seen := map[string]int{}
	for _, r := range rows(t, "ideal-gas.csv") {
		s, T := r["species"], r.number(t, "T_K")
		seen[s]++
		cp, h := ideal(named(t, s), T)
		wantCp, wantH := r.number(t, "cp_J_per_molK"), r.number(t, "h_minus_h298_J_per_mol")
		if d := math.Abs(cp - wantCp); d > 0.0005+tolerance[s].cp/100*wantCp {
			t.Errorf("%s %g K: cp = %.4f, want %.4f J/(mol K) (%.3f %%; %s)", s, T, cp, wantCp, 100*(cp/wantCp-1), r["source"])
		}
		if d := math.Abs(h - wantH); d > 0.6+tolerance[s].h/100*math.Abs(wantH) {
			t.Errorf("%s %g K: h = %.1f, want %.1f J/mol (%.3f %%; %s)", s, T, h, wantH, 100*(h/wantH-1), r["source"])
		}
	}
	for _, s := range append(Species(), "dry-air") {
		if seen[s] < 8 {
			t.Errorf("%s: compared %d rows, want 8 or more", s, seen[s])
		}
	}
}

// TestTrust holds the limits of pressure to the reference equations: no state
// up to the limit and at 300 K or above deviates by more than is accepted.
func TestTrust(t *testing.T) {
	compared := 0
	for _, r := range rows(t, "real-gas.csv") {
		s, T, p := r["species"], r.number(t, "T_K"), r.number(t, "p_Pa")
		f := named(t, s)
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
		if d := got.Cp/r.number(t, "cp_J_per_kgK") - 1; err != nil || math.Abs(d) > cpLimit {
			t.Errorf("%s %g K, %g Pa: cp is off by %.2f %%, %v (%s)", s, T, p, 100*d, err, r["eos"])
		}
		if d := got.Density/r.number(t, "rho_kg_per_m3") - 1; math.Abs(d) > rhoLimit {
			t.Errorf("%s %g K, %g Pa: density is off by %.2f %% (%s)", s, T, p, 100*d, r["eos"])
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
	ideal, err2 := mustNew(t, map[string]float64{"H2O": 1}).At(T, p)
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

func TestEveryGasHasItsTrust(t *testing.T) {
	for _, s := range Species() {
		if k := trusts[s]; !(k.cp > 0 && k.density > 0 && k.fit > 0) {
			t.Errorf("%s: %+v", s, k)
		}
	}
	if len(trusts) != len(table) {
		t.Errorf("%d gases, %d entries of trust", len(table), len(trusts))
	}
}
