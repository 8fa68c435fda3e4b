package food

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

const atm = 101325.0

func mustProduct(t testing.TB, name string) thermo.Fluid {
	t.Helper()
	f, err := Product(name)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func mustNew(t testing.TB, c Composition) thermo.Fluid {
	t.Helper()
	f, err := New(c)
	if err != nil {
		t.Fatal(err)
	}
	return f
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
	T, cp, density, handbook float64 // handbook is 0 where there is none
}

func checks(t *testing.T) []check {
	t.Helper()
	file, err := os.Open("testdata/food.csv")
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
	var out []check
	for _, l := range lines[1:] {
		var v [10]float64
		for k, s := range l[1:] {
			if s == "" {
				continue
			}
			if v[k], err = strconv.ParseFloat(s, 64); err != nil {
				t.Fatal(err)
			}
		}
		out = append(out, check{l[0], Composition{Water: v[0], Protein: v[1], Fat: v[2], Carbohydrate: v[3], Fibre: v[4], Ash: v[5]}, v[6], v[7], v[8], v[9]})
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
		if d > tolerance {
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
		if err != nil || math.Abs(got.Cp/c.cp-1) > 3e-7 || math.Abs(got.Density/c.density-1) > 3e-7 {
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
		if c.handbook == 0 {
			continue
		}
		f := mustNew(t, c.composition)
		got, err := f.At(c.T, atm)
		u, _ := f.Uncertainty(c.T, atm)
		d := math.Abs(got.Cp/c.handbook - 1)
		t.Logf("%s: cp %.1f, handbook %g, deviation %.2f %%, stated half-width %.2f %%", c.food, got.Cp, c.handbook, 100*d, 100*u*math.Sqrt(3))
		if err != nil || !(d < limit[c.food]) || d > u*math.Sqrt(3) {
			t.Errorf("%s: cp %g, %v; handbook %g", c.food, got.Cp, err, c.handbook)
		}
	}
}

// Densities of milk at 20 °C, from memory: whole 1030, skim 1035 kg/m³; of wort of 12 °P
// 1046.5 (specific gravity 1.0484). Ours are lower, within the half-width that we state.
func TestDensityWithinUncertainty(t *testing.T) {
	for name, want := range map[string]float64{"whole milk": 1030, "skim milk": 1035, "beer wort": 1046.5} {
		f := mustProduct(t, name)
		got, err := f.At(293.15, atm)
		_, u := f.Uncertainty(293.15, atm)
		d := math.Abs(got.Density/want - 1)
		t.Logf("%s: %.1f kg/m³, want %g, deviation %.2f %%, stated half-width %.2f %%", name, got.Density, want, 100*d, 100*u*math.Sqrt(3))
		if err != nil || d > u*math.Sqrt(3) {
			t.Errorf("%s: %+v, %v; want %g", name, got, err, want)
		}
	}
}

// The deviations of the water polynomials are what package water shows them to be, from 0
// °C to 150 °C: within 0.0006 of cp and 0.0004 of density.
func TestWaterDeviation(t *testing.T) {
	f := mustNew(t, Composition{Water: 1})
	var worst float64
	for c := 0.0; c <= 150; c += 1.25 {
		T, p := zeroC+c, atm
		if c > 99 {
			p, _ = water.SaturationPressure(T)
			p *= 1.001
		}
		want, err := water.Liquid().At(T, p)
		if err != nil {
			t.Fatal(err)
		}
		got, err := f.At(T, p)
		if err != nil {
			t.Fatal(err)
		}
		cp, density := f.Uncertainty(T, p)
		dCp := math.Sqrt(3)*cp - math.Abs(got.Cp/want.Cp-1)
		dDensity := math.Sqrt(3)*density - math.Abs(got.Density/want.Density-1)
		worst = max(worst, math.Abs(dCp))
		if !(math.Abs(dCp) < 0.0006) || !(dDensity > -0.0004) {
			t.Errorf("%g °C: cp %g of %g, density %g of %g; stated half-widths miss the deviation by %.2g and %.2g", c, got.Cp, want.Cp, got.Density, want.Density, dCp, dDensity)
		}
	}
	t.Logf("stated deviation of cp within %.2g of the true one", worst)
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
			if m = tt.volume * s.Density; err != nil || math.Abs(m/tt.mass-1) > 1e-6 {
				t.Errorf("%s: %.9g kg/s, %v; want %.9g", tt.food, m, err, tt.mass)
			}
		}
		q, err := thermo.StreamHeat(f, m, tt.T1, 3e5, tt.T2, 3e5)
		if err != nil || math.Abs(q/tt.heat-1) > 1e-6 {
			t.Errorf("%s: %.9g W, %v; want %.9g", tt.food, q, err, tt.heat)
		}
	}
}

// Half-widths by hand. Water: its deviation, 1.08 % of cp at 40 °C. Fat alone: 6 % of cp,
// and 80 kJ/kg over 40 K below that, 2000 of 1984.2 J/(kg K) at 0 °C; 4 % of density. Sugar
// of 70 % and water of 30 % at 40 °C: shares of cp 0.5227 and 0.4773 of 2372.7 J/(kg K), of
// volume 0.4069 and 0.5931.
func TestUncertainty(t *testing.T) {
	for _, tt := range []struct {
		c                      Composition
		celsius, cp, rho, slop float64
	}{
		{Composition{Water: 1}, 40, 0.0108, 0.0011, 1e-12},
		{Composition{Fat: 1}, 0, 0.06 + 2000/1984.2, 0.04, 1e-12},
		{Composition{Fat: 1}, 39.99, 0.06 + 2000/2035.4, 0.04, 1e-4},
		{Composition{Fat: 1}, 40, 0.06, 0.04, 1e-12},
		{Composition{Fat: 1}, 150, 0.06, 0.04, 1e-12},
		{Composition{Water: 0.3, Carbohydrate: 0.7}, 40, 0.5227*0.0108 + 0.4773*0.06, 0.4069*0.0011 + 0.5931*0.08, 1e-5},
	} {
		cp, density := mustNew(t, tt.c).Uncertainty(zeroC+tt.celsius, atm)
		if r := math.Sqrt(3); math.Abs(cp*r-tt.cp) > tt.slop || math.Abs(density*r-tt.rho) > tt.slop {
			t.Errorf("%v at %g °C: half-widths %.5f, %.5f; want %.5f, %.5f", tt.c, tt.celsius, cp*r, density*r, tt.cp, tt.rho)
		}
	}
}

// Melting milk fat takes up 80 kJ/kg between 0 °C and 40 °C: a cream's true heat lies
// within the half-width of ours.
func TestMeltingIsCovered(t *testing.T) {
	for name, fraction := range map[string]float64{"cream": 0.4, "whole milk": 0.035} {
		f := mustProduct(t, name)
		ours, err := thermo.StreamHeat(f, 1, 273.15, 3e5, 313.14, 3e5)
		if err != nil {
			t.Fatal(err)
		}
		least := math.Inf(1)
		for T := 273.15; T < 313.14; T += 5 {
			u, _ := f.Uncertainty(T, 3e5)
			least = min(least, u*math.Sqrt(3))
		}
		molten := fraction * 80e3 / ours
		t.Logf("%s: fat adds %.1f %%, half-width from %.1f %%", name, 100*molten, 100*least)
		if !(molten < least) {
			t.Errorf("%s: melting fat adds %.3g of the heat, half-width %.3g", name, molten, least)
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
		if !errors.As(err, &e) || e.Why != tt.why || math.Abs(e.Bound-tt.end) > 1e-3 {
			t.Errorf("%g K, %g Pa: %v; want %g, %q", tt.T, tt.p, err, tt.end, tt.why)
		}
	}
}

func TestNewRefuses(t *testing.T) {
	for _, tt := range []struct {
		c    Composition
		want string
	}{
		{Composition{}, "food {}: the mass fractions make 0 together"},
		{Composition{Water: 0.9, Fat: 0.05}, "food {water: 90 %, fat: 5 %}: the mass fractions make 0.95 together"},
		{Composition{Water: 0.9, Fat: 0.11}, "make 1.01 together"},
		{Composition{Water: 1.1}, "mass fraction of water is 1.1"},
		{Composition{Water: 1, Fibre: -0.1}, "mass fraction of fibre is -0.1"},
		{Composition{Water: math.NaN()}, "mass fraction of water is NaN"},
		{Composition{Water: 0.1, Fat: 0.05, Carbohydrate: 0.85}, "it has 0.1 of water and 0.05 of fat; with less than 0.2 of the one and 0.5 of the other it is no liquid"},
		{Composition{Water: 0.19, Fat: 0.49, Carbohydrate: 0.32}, "it is no liquid"},
	} {
		if f, err := New(tt.c); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("New(%+v) = %v, %v; want an error with %q", tt.c, f, err, tt.want)
		}
	}
}

// An analysis that misses the whole by a little is scaled to it.
func TestCompositionIsScaled(t *testing.T) {
	whole := mustNew(t, Composition{Water: 0.875, Carbohydrate: 0.125})
	short := mustNew(t, Composition{Water: 0.875 * 0.996, Carbohydrate: 0.125 * 0.996})
	a, err1 := whole.At(300, atm)
	b, err2 := short.At(300, atm)
	if err1 != nil || err2 != nil || math.Abs(a.Cp/b.Cp-1) > 1e-14 || math.Abs(a.Density/b.Density-1) > 1e-14 {
		t.Errorf("%+v, %v; scaled %+v, %v", a, err1, b, err2)
	}
}

func TestNames(t *testing.T) {
	for written, want := range map[string]string{
		"Whole Milk": "whole milk", "whole-milk": "whole milk", "milk": "whole milk", "beer wort 12 °P": "beer wort", "WORT": "beer wort", "orangejuice": "orange juice",
	} {
		if f, err := Product(written); err != nil || f.Name() != want {
			t.Errorf("Product(%q) = %v, %v; want %q", written, f, err, want)
		}
	}
	_, err := Product("whole mlk")
	if want := `unknown food "whole mlk", did you mean "whole milk"; known: whole milk, skim milk, cream, whey, beer wort, orange juice`; err == nil || err.Error() != want {
		t.Errorf("Product(whole mlk): %v; want %s", err, want)
	}
	for other, name := range also {
		if f, err := Product(other); err != nil || f.Name() != name {
			t.Errorf("%q leads to %v, %v; want %q", other, f, err, name)
		}
	}
	f := mustNew(t, Composition{Water: 0.873, Fat: 0.039, Protein: 0.033, Carbohydrate: 0.048, Ash: 0.007})
	if want := "food: {water: 87.3 %, fat: 3.9 %, protein: 3.3 %, carbohydrate: 4.8 %, ash: 0.7 %}"; f.Name() != want {
		t.Errorf("name %q, want %q", f.Name(), want)
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
