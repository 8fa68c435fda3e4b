package food

import (
	"errors"
	"math"
	"os"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

const atm = 101325.0

func mustProduct(t testing.TB, name string) thermo.Fluid {
	t.Helper()
	return fluidtest.Must(Product(name))(t)
}

func mustNew(t testing.TB, c Composition) thermo.Fluid {
	t.Helper()
	return fluidtest.Must(New(c))(t)
}

func TestConformance(t *testing.T) {
	for _, name := range Products() {
		t.Run(name, func(t *testing.T) { fluidtest.Run(t, mustProduct(t, name)) })
	}
	for name, c := range map[string]Composition{
		"water": {Water: 1},
		"fat":   {Fat: 1},
		"syrup": {Water: 0.3, Carbohydrate: 0.699, Ash: 0.001},
		"soup":  {Water: 0.9, Fat: 0.02, Protein: 0.02, Carbohydrate: 0.04, Fibre: 0.01, Ash: 0.01},
	} {
		t.Run(name, func(t *testing.T) { fluidtest.Run(t, mustNew(t, c)) })
	}
}

// check is a row of testdata/food.csv.
type check struct {
	food                     string
	composition              Composition
	T, cp, density, handbook float64 // handbook is NaN where there is none
}

func checks(t *testing.T) []check {
	t.Helper()
	var out []check
	for _, r := range fluidtest.Rows(t, os.DirFS("testdata"), "food.csv") {
		out = append(out, check{
			r.Text("food"),
			Composition{Water: r.Number("water"), Protein: r.Number("protein"), Fat: r.Number("fat"), Carbohydrate: r.Number("carbohydrate"), Fibre: r.Number("fibre"), Ash: r.Number("ash")},
			r.Number("T_K"), r.Number("cp_J_per_kgK"), r.Number("rho_kg_per_m3"), r.Printed("handbook_cp_J_per_kgK"),
		})
	}
	return out
}

// Every row within 3e-7, which is the printing. The rows of one dry component, which is no
// liquid, go past New.
func TestChecks(t *testing.T) {
	const tolerance = 3e-7
	all := checks(t)
	if len(all) != 56 {
		t.Errorf("%d rows, want 56", len(all))
	}
	var worst float64
	for _, c := range all {
		got, err := mix(c.food, citation, c.composition).At(c.T, atm)
		if err != nil {
			t.Errorf("%s: %v", c.food, err)
			continue
		}
		d := max(math.Abs(got.Cp/c.cp-1), math.Abs(got.Density/c.density-1))
		worst = max(worst, d)
		if !(d <= tolerance) {
			t.Errorf("%s at %g K: cp %.9g, density %.9g; want %g, %g within %g", c.food, c.T, got.Cp, got.Density, c.cp, c.density, tolerance)
		}
		if f, err := New(c.composition); err == nil {
			if s, err := f.At(c.T, atm); err != nil || s != got {
				t.Errorf("%s by New: %+v, %v; want %+v", c.food, s, err, got)
			}
		} else if !strings.HasPrefix(c.food, "pure ") {
			t.Error(err)
		}
	}
	t.Logf("%d rows, worst deviation %.2g", len(all), worst)
}

// The products are the foods of these rows.
func TestProductsAreTheChecked(t *testing.T) {
	n := 0
	for _, c := range checks(t) {
		f, err := Product(c.food)
		if err != nil {
			continue // the pure components and the two of the handbook
		}
		n++
		got, err := f.At(c.T, 3e5)
		if err != nil || !(math.Abs(got.Cp/c.cp-1) <= 3e-7) || !(math.Abs(got.Density/c.density-1) <= 3e-7) {
			t.Errorf("%s at %g K: %+v, %v; want cp %g, density %g", c.food, c.T, got, err, c.cp, c.density)
		}
	}
	if n != 36 {
		t.Errorf("%d rows are of products, want 36", n)
	}
}

// Handbook cp of whole and skim milk (ASHRAE Handbook Refrigeration, from memory) within
// 1.22 % and 0.83 % of ours, and within the half-width that we state. The handbook is
// believed, for it measured; Choi and Okos' water is what is low.
func TestHandbookMilk(t *testing.T) {
	limit := map[string]float64{"handbook whole milk": 0.0122, "handbook skim milk": 0.0083}
	for _, c := range checks(t) {
		if math.IsNaN(c.handbook) {
			continue
		}
		f := mustNew(t, c.composition)
		got, err := f.At(c.T, atm)
		u, _ := f.Uncertainty(c.T, atm)
		d := math.Abs(got.Cp/c.handbook - 1)
		t.Logf("%s: cp %.1f, handbook %g, deviation %.2f %%, stated half-width %.2f %%", c.food, got.Cp, c.handbook, 100*d, 100*u*math.Sqrt(3))
		if err != nil || !(d < limit[c.food]) || !(d <= u*math.Sqrt(3)) {
			t.Errorf("%s: cp %g, %v; handbook %g", c.food, got.Cp, err, c.handbook)
		}
	}
}

// Heat as worked outside of this project by the same equations, within 1e-4; the pressure
// is 3 bar throughout.
func TestWorkedHeat(t *testing.T) {
	for _, tt := range []struct {
		food         string
		volume, mass float64 // m³/s at the inlet where it is not 0, kg/s
		T1, T2, heat float64
	}{
		{"whole milk", 10. / 3600, 2.8501831, 277.15, 345.15, 745815.61},
		{"beer wort", 20. / 3600, 5.6108385, 368.15, 285.15, -1789877.1},
		{"orange juice", 0, 0.83333333, 278.15, 365.15, 279072.8},
	} {
		f := mustProduct(t, tt.food)
		m := tt.mass
		if tt.volume > 0 {
			s, err := f.At(tt.T1, 3e5)
			if m = tt.volume * s.Density; err != nil || !(math.Abs(m/tt.mass-1) <= 1e-6) {
				t.Errorf("%s: %.9g kg/s, %v; want %.9g", tt.food, m, err, tt.mass)
			}
		}
		q, err := thermo.StreamHeat(f, m, tt.T1, 3e5, tt.T2, 3e5)
		if err != nil || !(math.Abs(q/tt.heat-1) <= 1e-6) {
			t.Errorf("%s: %.9g W, %v; want %.9g", tt.food, q, err, tt.heat)
		}
	}
}

// Frying oil does not boil at 150 °C; with a little water in it that does.
func TestBounds(t *testing.T) {
	dry, wet := mustNew(t, Composition{Fat: 1}), mustNew(t, Composition{Fat: 0.999, Water: 0.001})
	if _, err := dry.At(423.15, atm); err != nil {
		t.Error(err)
	}
	if lo, hi := dry.Span(atm); lo != 0 || !math.IsInf(hi, 1) {
		t.Errorf("a fat without water spans %g K to %g K", lo, hi)
	}
	for _, tt := range []struct {
		f         thermo.Fluid
		T, p, end float64
		why       string
	}{
		{dry, 273, atm, 273.15, "fat sets; where it does is not known"},
		{wet, 273, atm, 273.15, "freezing point of water; the food freezes a little lower"},
		{wet, 400, atm, 373.124, "boiling point of water at this pressure; the food boils a little later"},
		{wet, 424, 2e6, 423.15, "range of Choi and Okos"},
		{wet, 300, 2.6e6, 2.5e6, "range of Choi and Okos"},
		{wet, 300, 611, 611.2127, "range of Choi and Okos"},
	} {
		_, err := tt.f.At(tt.T, tt.p)
		e := new(thermo.RangeError)
		if !errors.As(err, &e) || e.Why != tt.why || !(math.Abs(e.Bound-tt.end) <= 1e-3) {
			t.Errorf("%g K, %g Pa: %v; want %g, %q", tt.T, tt.p, err, tt.end, tt.why)
		}
	}
}

// What the pressure term of 60 °C misses at 0 °C and 150 °C, in kJ/kg per MPa: the comment of
// the package says at most 0.34.
func TestSpreadOfPressureTerm(t *testing.T) {
	worst := 0.0
	for _, c := range []Composition{{Water: 1}, {Fat: 1}, products[0].Composition, {Water: 0.3, Carbohydrate: 0.7}} {
		worst = max(worst, 1e3*mustNew(t, c).(thermo.Compressed).PressureLaw().Spread)
	}
	if !(worst > 0.33 && worst < 0.34) {
		t.Errorf("up to %.3f kJ/kg per MPa", worst)
	}
}
