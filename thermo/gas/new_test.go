package gas

import (
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
)

func TestNewRefuses(t *testing.T) {
	for _, tt := range []struct {
		fractions map[string]float64
		want      []string // parts of the message
	}{
		{map[string]float64{"n2": 1}, []string{`unknown gas "n2"`, `"N2" (nitrogen)`, "known gases: N2, O2, Ar, CO2"}},
		{map[string]float64{"methane": 1}, []string{`unknown gas "methane"`, `"CH4" (methane)`}},
		{map[string]float64{"O": 1}, []string{`"O2" (oxygen)`}},
		{map[string]float64{"XY": 1}, []string{`unknown gas "XY"; known gases: N2`}},
		{map[string]float64{"": 1}, []string{`unknown gas ""; known`}},
		{map[string]float64{"N2": 0.7, "O2": 0.2}, []string{"add up to 0.9;"}},
		{map[string]float64{"N2": 78, "O2": 22}, []string{"share of N2 is 78"}},
		{map[string]float64{"N2": 1.1, "O2": -0.1}, []string{"share of N2 is 1.1"}},
		{map[string]float64{"N2": math.NaN(), "O2": 0.5}, []string{"share of N2 is NaN"}},
		{map[string]float64{"N2": 0.5, "O2": 0.5011}, []string{"add up to 1.0011"}},
		{nil, []string{"add up to 0;"}},
	} {
		f, err := New(tt.fractions)
		if err == nil {
			t.Errorf("%v: got %q, want an error", tt.fractions, f.Name())
			continue
		}
		for _, part := range tt.want {
			if !strings.Contains(err.Error(), part) {
				t.Errorf("%v: error %q lacks %q", tt.fractions, err, part)
			}
		}
	}
}

// A rounded composition is spread over all parts, and the result does not hang
// on the order in which a map is walked.
func TestNewIsExact(t *testing.T) {
	rounded := mustNew(t, map[string]float64{"N2": 0.7805, "O2": 0.2095, "Ar": 0.0093})
	exact := mustNew(t, map[string]float64{"N2": 0.7805 / 0.9993, "O2": 0.2095 / 0.9993, "Ar": 0.0093 / 0.9993})
	a, _ := rounded.At(400, 1e5)
	b, _ := exact.At(400, 1e5)
	if math.Abs(a.Cp/b.Cp-1) > 1e-14 || math.Abs(a.Density/b.Density-1) > 1e-14 {
		t.Errorf("rounded %+v, exact %+v", a, b)
	}
	first := mustNew(t, flue)
	for range 50 {
		again := mustNew(t, flue)
		x, _ := first.At(500, 1e5)
		y, _ := again.At(500, 1e5)
		if x != y || first.Name() != again.Name() {
			t.Fatalf("%q %+v, then %q %+v", first.Name(), x, again.Name(), y)
		}
	}
	if want := "gas of N2 71.2 %, H2O 17.2 %, CO2 8.6 %, O2 3 %"; first.Name() != want {
		t.Errorf("name %q, want %q", first.Name(), want)
	}
}

// Molar mass of dry air as in the NASA file, species Air: 28.9651159 g/mol.
func TestDryAirMolarMass(t *testing.T) {
	if m := DryAir().MolarMass(); math.Abs(m-28.9651159e-3) > 1e-9 {
		t.Errorf("%.9g kg/mol, want 0.0289651159", m)
	}
}

// Mayer: cp − cv = R per mole, for every gas at every temperature.
func TestCpMinusCv(t *testing.T) {
	gases := []thermo.Fluid{DryAir(), mustNew(t, flue)}
	for _, s := range Species() {
		gases = append(gases, mustNew(t, map[string]float64{s: 1}))
	}
	for _, f := range gases {
		for T := 400.0; T <= 2000; T += 37 {
			p, err := f.At(T, 1e5)
			if err != nil {
				t.Fatal(err)
			}
			if got := (p.Cp - p.Cv) * f.MolarMass(); math.Abs(got/thermo.R-1) > 1e-12 {
				t.Errorf("%s %g K: cp − cv = %.15g J/(mol K), want R", f.Name(), T, got)
			}
		}
	}
}

// The two ranges of the polynomials meet at 1000 K: no step in h, and in cp one
// of the fit's own accuracy.
func TestSeam(t *testing.T) {
	for _, s := range Species() {
		m := mustNew(t, map[string]float64{s: 1}).(*mixture)
		cp1, h1 := m.low.at(seam)
		cp2, h2 := m.high.at(seam)
		if math.Abs(h2-h1) > 1e-13*math.Abs(h1) || math.Abs(cp2/cp1-1) > 1e-8 {
			t.Errorf("%s: cp/R %.12g and %.12g, h/RT %.15g and %.15g", s, cp1, cp2, h1, h2)
		}
	}
}

func TestDewPoint(t *testing.T) {
	for _, tt := range []struct {
		name      string
		fractions map[string]float64
		p, want   float64 // Pa, K
		tolerance float64 // K
		source    string
	}{
		{"water", map[string]float64{"H2O": 1}, 1e5, 372.755919, 1e-6, "R7-97(2012), table 36"},
		{"a tenth of water", map[string]float64{"N2": 0.9, "H2O": 0.1}, 1e6, 372.755919, 1e-6, "R7-97(2012), table 36, at the partial pressure"},
		{"ice", map[string]float64{"N2": 0.998, "H2O": 0.002}, 8.94735 / 0.002, 230, 0.03, "IAPWS R14-08, check value at 230 K: 8.94735 Pa"},
		{"propane", map[string]float64{"C3H8": 1}, 101325, 231.04, 1.5, "normal boiling point (from memory)"},
		{"ammonia", map[string]float64{"NH3": 1}, 101325, 239.82, 1.5, "normal boiling point (from memory)"},
		{"sulfur dioxide", map[string]float64{"SO2": 1}, 101325, 263.1, 1.5, "normal boiling point (from memory)"},
		{"carbon dioxide", map[string]float64{"CO2": 1}, 101325, 194.69, 0.1, "sublimation point (from memory)"},
	} {
		f := mustNew(t, tt.fractions)
		lo, hi := f.Span(tt.p)
		if math.Abs(lo-tt.want) > tt.tolerance || !math.IsInf(hi, 1) {
			t.Errorf("%s at %g Pa: span %.3f to %g K, want %.3f ± %g (%s)", tt.name, tt.p, lo, hi, tt.want, tt.tolerance, tt.source)
		}
	}
	if lo, _ := DryAir().Span(5e5); lo != 0 {
		t.Errorf("dry air: dew point %g K, want none", lo)
	}
}

func TestWetIsRefused(t *testing.T) {
	_, err := mustNew(t, flue).At(320, 101325)
	e := new(thermo.RangeError)
	if !errors.As(err, &e) || e.Why != "dew or frost point of H2O" || !e.Below {
		t.Errorf("flue gas at 320 K: %v, want its dew point", err)
	}
}
