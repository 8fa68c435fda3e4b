package aqueous

import (
	"encoding/csv"
	"errors"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
	"heatreeve/thermo/water"
)

func mustNew(t testing.TB, solute string, x, u float64) thermo.Fluid {
	t.Helper()
	f, err := New(solute, x, u)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func TestConformance(t *testing.T) {
	for _, s := range Solutes() {
		for _, x := range []float64{0, 0.1, 0.32, 0.5, 0.6} {
			f := mustNew(t, s, x, 0.005)
			t.Run(f.Name(), func(t *testing.T) { fluidtest.Run(t, f) })
		}
	}
}

// pressure at which none of the mixtures boils.
const pressure = 3e5

// TestAgainstTables holds the polynomials to values of the same polynomials from
// elsewhere, to all digits shown, and to the ASHRAE tables within the largest
// deviations measured, in percent, rounded up.
func TestAgainstTables(t *testing.T) {
	tolerance := map[string]struct{ density, cp float64 }{
		"ethylene glycol":  {0.93, 3.23},
		"propylene glycol": {0.65, 0.36},
	}
	fits, references := 0, 0
	for _, r := range rows(t) {
		f := mustNew(t, r.solute, r.x, 0)
		p, err := f.At(r.T, pressure)
		if err != nil {
			t.Errorf("%s %g K: %v", f.Name(), r.T, err)
			continue
		}
		fits++
		slack := 0.0
		if r.source != "" {
			slack = 6e-6 // the mass fraction itself is rounded to 0.00005
		}
		if math.Abs(p.Density-r.fitDensity) > 0.00006+slack*p.Density || math.Abs(p.Cp-r.fitCp) > 0.0006+slack*p.Cp || math.Abs(f.Bounds().MinT-r.fitFreezing) > 0.006 {
			t.Errorf("%s %g K: density %.5f, cp %.4f, freezing point %.3f; want %.4f, %.3f, %.2f",
				f.Name(), r.T, p.Density, p.Cp, f.Bounds().MinT, r.fitDensity, r.fitCp, r.fitFreezing)
		}
		if r.source == "" {
			continue
		}
		references++
		if d := 100 * (p.Density/r.density - 1); math.Abs(d) > tolerance[r.solute].density {
			t.Errorf("%s %g K: density is off by %.3f %% (%s)", f.Name(), r.T, d, r.source)
		}
		if d := 100 * (p.Cp/r.cp - 1); math.Abs(d) > tolerance[r.solute].cp {
			t.Errorf("%s %g K: cp is off by %.3f %% (%s)", f.Name(), r.T, d, r.source)
		}
	}
	if fits < 105 || references < 79 {
		t.Errorf("compared %d fits and %d references, want 105 and 79", fits, references)
	}
}

type row struct {
	solute                         string
	x, T                           float64
	fitDensity, fitCp, fitFreezing float64
	density, cp                    float64
	source                         string
}

func rows(t *testing.T) []row {
	t.Helper()
	file, err := os.Open("testdata/glycols.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	c := csv.NewReader(file)
	c.Comment = '#'
	lines, err := c.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []row
	for _, l := range lines[1:] {
		r := row{solute: l[0], source: l[8]}
		for k, to := range []*float64{&r.x, &r.T, &r.fitDensity, &r.fitCp, &r.fitFreezing, &r.density, &r.cp} {
			if l[k+1] == "" && r.source == "" {
				continue // a row without a reference
			}
			if *to, err = strconv.ParseFloat(l[k+1], 64); err != nil {
				t.Fatalf("row %q: %v", l, err)
			}
		}
		out = append(out, r)
	}
	return out
}

// The pressure term against water: dilute glycol at 20 °C and 60 °C must change
// its enthalpy with pressure as IAPWS-IF97 water does, within the spread that a
// term of one value for all temperatures leaves.
func TestPressureTerm(t *testing.T) {
	w, g := water.Liquid(), mustNew(t, "propylene glycol", 0.01, 0)
	rise := func(f thermo.Fluid, T float64) float64 {
		a, err1 := f.At(T, 1e5)
		b, err2 := f.At(T, 1.1e6)
		if err := errors.Join(err1, err2); err != nil {
			t.Fatal(err)
		}
		return b.Enthalpy - a.Enthalpy
	}
	for _, T := range []float64{293.15, 313.15, 333.15} {
		if got, want := rise(g, T), rise(w, T); math.Abs(got-want) > 0.1*want {
			t.Errorf("%g K: %.0f J/kg per MPa, water %.0f", T, got, want)
		}
	}
}

// The uncertainty of the concentration counts by the slope of cp and density,
// here taken as a difference between neighbouring mixtures.
func TestUncertaintyOfConcentration(t *testing.T) {
	for _, s := range Solutes() {
		const x, u = 0.35, 0.02
		exact, vague := mustNew(t, s, x, 0), mustNew(t, s, x, u)
		cp0, rho0 := exact.Uncertainty(293.15, 1e5)
		cp, rho := vague.Uncertainty(293.15, 1e5)
		T := (exact.Bounds().MinT + exact.Bounds().MaxT) / 2
		lo, err1 := mustNew(t, s, x-1e-4, 0).At(T, pressure)
		hi, err2 := mustNew(t, s, x+1e-4, 0).At(T, pressure)
		if err := errors.Join(err1, err2); err != nil {
			t.Fatal(err)
		}
		wantCp := math.Hypot(cp0, u*math.Log(hi.Cp/lo.Cp)/2e-4)
		wantRho := math.Hypot(rho0, u*math.Log(hi.Density/lo.Density)/2e-4)
		if math.Abs(cp/wantCp-1) > 1e-6 || math.Abs(rho/wantRho-1) > 1e-6 || !(cp > cp0 && rho > rho0) {
			t.Errorf("%s: %g and %g, want %g and %g", s, cp, rho, wantCp, wantRho)
		}
	}
}

func TestNewRefuses(t *testing.T) {
	for _, tt := range []struct {
		solute string
		x, u   float64
		want   string
	}{
		{"propylen glycol", 0.3, 0, `unknown solute "propylen glycol", did you mean "propylene glycol"; known solutes: ethylene glycol, propylene glycol`},
		{"brine", 0.3, 0, `unknown solute "brine"; known`},
		{"ethylene glycol", 0.61, 0, "mass fraction 0.61"},
		{"ethylene glycol", -0.01, 0, "mass fraction -0.01"},
		{"ethylene glycol", 32, 0, "mass fraction 32"},
		{"ethylene glycol", math.NaN(), 0, "mass fraction NaN"},
		{"ethylene glycol", 0.3, -0.01, "uncertainty of the mass fraction is -0.01"},
		{"ethylene glycol", 0.3, math.Inf(1), "uncertainty of the mass fraction is +Inf"},
	} {
		if f, err := New(tt.solute, tt.x, tt.u); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("New(%q, %g, %g) = %v, %v; want an error with %q", tt.solute, tt.x, tt.u, f, err, tt.want)
		}
	}
}

func TestRefusalNamesTheBound(t *testing.T) {
	f := mustNew(t, "propylene glycol", 0.32, 0)
	for _, tt := range []struct {
		T, p float64
		why  string
	}{
		{250, pressure, "freezing point"},
		{380, pressure, "range of the polynomials"},
		{350, 20e3, "boiling point of water at this pressure; the mixture boils a little later"},
		{300, 3e6, "range of the polynomials"},
	} {
		_, err := f.At(tt.T, tt.p)
		e := new(thermo.RangeError)
		if !errors.As(err, &e) || e.Why != tt.why {
			t.Errorf("%g K, %g Pa: %v, want %q", tt.T, tt.p, err, tt.why)
		}
	}
}

var sink float64

func BenchmarkGlycol(b *testing.B) {
	f := mustNew(b, "propylene glycol", 0.32, 0.006)
	b.ReportAllocs()
	T := 280.0
	for b.Loop() {
		s, _ := f.At(T, pressure)
		sink += s.Enthalpy + s.Density + s.Cp
		T += 1e-9 // never the same state twice
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/state")
}
