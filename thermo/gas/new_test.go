package gas

import (
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

func TestNewRefuses(t *testing.T) {
	for _, tt := range []struct {
		fractions map[string]float64
		want      []string // parts of the message
	}{
		{map[string]float64{"metane": 1}, []string{`unknown gas "metane"`, `"CH4" (methane)`, "known gases: N2, O2, Ar, CO2"}},
		{map[string]float64{"CH5": 1}, []string{`"CH4" (methane)`}},
		{map[string]float64{"O": 1}, []string{`"O2" (oxygen)`}},
		{map[string]float64{"XYZ": 1}, []string{`unknown gas "XYZ"; known gases: N2`}},
		{map[string]float64{"": 1}, []string{`unknown gas ""; known`}},
		{map[string]float64{"N2": 0.7, "nitrogen": 0.3}, []string{`"N2" and "nitrogen" are the same gas`}},
		{map[string]float64{"N2": 0.7, "O2": 0.2}, []string{"add up to 0.9;"}},
		{map[string]float64{"N2": 78, "O2": 22}, []string{"share of N2 is 78"}},
		{map[string]float64{"N2": 1.1, "O2": -0.1}, []string{"share of N2 is 1.1"}},
		{map[string]float64{"N2": math.NaN(), "O2": 0.5}, []string{"share of N2 is NaN"}},
		{map[string]float64{"N2": 0.5, "O2": 0.5011}, []string{"add up to 1.0011"}},
		{nil, []string{"add up to 0;"}},
	} {
		f, err := New(tt.fractions, Ideal)
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
	rounded := mustNew(t, map[string]float64{"N2": 0.7805, "O2": 0.2095, "Ar": 0.0093}, Ideal)
	exact := mustNew(t, map[string]float64{"N2": 0.7805 / 0.9993, "O2": 0.2095 / 0.9993, "Ar": 0.0093 / 0.9993}, Ideal)
	a, _ := rounded.At(400, 1e5)
	b, _ := exact.At(400, 1e5)
	if !(math.Abs(a.Cp/b.Cp-1) <= 1e-14) || !(math.Abs(a.Density/b.Density-1) <= 1e-14) {
		t.Errorf("rounded %+v, exact %+v", a, b)
	}
	first := mustNew(t, flue, Ideal)
	for range 50 {
		again := mustNew(t, flue, Ideal)
		x, _ := first.At(500, 1e5)
		y, _ := again.At(500, 1e5)
		if x != y || first.Name() != again.Name() {
			t.Fatalf("%q %+v, then %q %+v", first.Name(), x, again.Name(), y)
		}
	}
	if want := "gas: {N2: 71.2 %, H2O: 17.2 %, CO2: 8.6 %, O2: 3 %}"; first.Name() != want {
		t.Errorf("name %q, want %q", first.Name(), want)
	}
}

// Whatever the spelling, the gas is the same.
func TestSpelling(t *testing.T) {
	for _, tt := range [][]string{
		{"nitrogen", "N2", "n2", "N₂", "Nitrogen", " nitrogen "},
		{"methane", "CH4", "ch4", "Methane"},
		{"carbon dioxide", "CO2", "co2", "carbon-dioxide", "Carbon Dioxide", "CO₂"},
		{"sulfur dioxide", "SO2", "sulphur dioxide"},
		{"hydrogen sulfide", "H2S", "hydrogen sulphide"},
		{"n-butane", "C4H10", "butane", "n-c4h10", "C₄H₁₀"},
		{"ethylene", "C2H4", "ethene"},
		{"water vapour", "H2O", "water vapor", "steam"},
		{"dry air", "air", "dry-air", "Dry Air"},
	} {
		for _, word := range tt {
			f, err := New(map[string]float64{word: 1}, Ideal)
			if err != nil || f.Name() != tt[0] {
				t.Errorf("%q: %v, %v; want %q", word, f, err, tt[0])
			}
		}
	}
}

// Every name and formula leads to its own gas and no other.
func TestNamesAreUnique(t *testing.T) {
	count := 0
	for _, i := range ingredients() {
		for _, w := range i.words() {
			count++
			if got, err := lookup(w); err != nil || got.formula != i.formula {
				t.Errorf("%q leads to %v, %v; want %s", w, got, err, i.formula)
			}
		}
	}
	if count < 2*len(table) {
		t.Errorf("%d names of %d gases", count, len(table))
	}
}

func TestParseModel(t *testing.T) {
	for _, m := range []Model{Best, Ideal, PengRobinson, Reference} {
		if got, err := ParseModel(strings.ToUpper(m.String())); err != nil || got != m {
			t.Errorf("%v: got %v, %v", m, got, err)
		}
	}
	if got, err := ParseModel(""); err != nil || got != Best {
		t.Errorf("empty: got %v, %v", got, err)
	}
	if got, err := ParseModel("Peng Robinson"); err != nil || got != PengRobinson {
		t.Errorf("got %v, %v", got, err)
	}
	if _, err := ParseModel("idael"); err == nil || !strings.Contains(err.Error(), "did you mean ideal; models of a gas: best, ideal, peng-robinson, reference") {
		t.Errorf("got %v", err)
	}
	if _, err := DryAir(Model(9)); err == nil || !strings.Contains(err.Error(), "unknown model Model(9)") {
		t.Errorf("got %v", err)
	}
}

// Air by mass is N2 75.52 %, O2 23.14 %, Ar 1.29 %, CO2 0.05 % (US Standard Atmosphere 1976
// composition, by mass; from memory).
func TestMoleFractions(t *testing.T) {
	got, err := MoleFractions(map[string]float64{"nitrogen": 0.7552, "O2": 0.2314, "Ar": 0.0129, "CO2": 0.0005})
	if err != nil {
		t.Fatal(err)
	}
	var sum float64
	for _, c := range airParts {
		if d := got[c.formula] - c.share; !(math.Abs(d) <= 5e-5) {
			t.Errorf("%s: mole fraction %.5f, want %.5f", c.formula, got[c.formula], c.share)
		}
		sum += got[c.formula]
	}
	if !(math.Abs(sum-1) <= 1e-15) || len(got) != 4 {
		t.Errorf("%v add up to %.17g", got, sum)
	}
	// equal masses of hydrogen and helium: exact by their molar masses
	got, err = MoleFractions(map[string]float64{"H2": 0.5, "He": 0.5})
	if want := 4.002602 / (4.002602 + 2.01588); err != nil || !(math.Abs(got["H2"]-want) <= 1e-15) {
		t.Errorf("got %v, %v; want H2 %.15g", got, err, want)
	}
	if _, err = MoleFractions(map[string]float64{"H2": 0.5}); err == nil || !strings.Contains(err.Error(), "the mass fractions add up to 0.5") {
		t.Errorf("got %v", err)
	}
}

func mustAir(t testing.TB, model Model) thermo.Fluid {
	t.Helper()
	return fluidtest.Must(DryAir(model))(t)
}

// Dry air within another mixture is what it is made of.
func TestAirAsAPart(t *testing.T) {
	a := mustNew(t, map[string]float64{"air": 0.9, "CO2": 0.1}, Ideal)
	b := mustNew(t, map[string]float64{"N2": 0.9 * 0.78084, "O2": 0.9 * 0.209476, "Ar": 0.9 * 0.009365, "CO2": 0.1 + 0.9*0.000319}, Ideal)
	x, err1 := a.At(500, 1e5)
	y, err2 := b.At(500, 1e5)
	if err := errors.Join(err1, err2); err != nil || !(math.Abs(x.Cp/y.Cp-1) <= 1e-14) || !(math.Abs(a.MolarMass()/b.MolarMass()-1) <= 1e-14) {
		t.Errorf("%+v, want %+v, %v", x, y, err)
	}
	if want := "gas: {dry air: 90 %, CO2: 10 %}"; a.Name() != want {
		t.Errorf("name %q, want %q", a.Name(), want)
	}
}

// Dry air as a mixture against the species Air of the NASA file, which was fitted by itself
// (NASA/TP-2002-211556, file thermo.inp): molar mass 28.9651159 g/mol, and cp within 0.01 %.
func TestDryAirAgainstTheSpeciesAir(t *testing.T) {
	m := mustAir(t, Ideal).(*mixture)
	if !(math.Abs(m.molarMass-28.9651159e-3) <= 1e-9) {
		t.Errorf("%.9g kg/mol, want 0.0289651159", m.molarMass)
	}
	air := polynomials{
		low:  range9{[7]float64{10099.5016, -196.827561, 5.00915511, -0.00576101373, 1.06685993e-05, -7.94029797e-09, 2.18523191e-12}, -176.796731},
		high: range9{[7]float64{241521.443, -1257.8746, 5.14455867, -0.000213854179, 7.06522784e-08, -1.07148349e-11, 6.57780015e-16}, 6462.26319},
	}
	air.setZero()
	for T := 200.0; T <= 2000; T += 50 {
		cp, h := m.at(T)
		wantCp, wantH := air.at(T)
		if !(math.Abs(cp/wantCp-1) <= 1e-4) || !(math.Abs(h-wantH) <= 1e-4) {
			t.Errorf("%g K: cp/R %.6f and h/RT %.6f, the species has %.6f and %.6f", T, cp, h, wantCp, wantH)
		}
	}
}

// Mayer: cp − cv = R per mole, for every gas at every temperature.
func TestCpMinusCv(t *testing.T) {
	gases := []thermo.Fluid{mustAir(t, Ideal), mustNew(t, flue, Ideal)}
	for _, s := range Species() {
		gases = append(gases, pure(t, s, Ideal))
	}
	for _, f := range gases {
		for T := 700.0; T <= 2000; T += 37 {
			p, err := f.At(T, 1e5)
			if err != nil {
				t.Fatal(err)
			}
			if got := (p.Cp - p.Cv) * f.MolarMass(); !(math.Abs(got/thermo.R-1) <= 1e-12) {
				t.Errorf("%s %g K: cp − cv = %.15g J/(mol K), want R", f.Name(), T, got)
			}
		}
	}
}

// The two ranges of the polynomials meet at 1000 K: no step in h, and in cp one
// of the fit's own accuracy.
func TestSeam(t *testing.T) {
	for _, s := range Species() {
		m := pure(t, s, Ideal).(*mixture)
		cp1, h1 := m.low.at(seam)
		cp2, h2 := m.high.at(seam)
		if !(math.Abs(h2-h1) <= 1e-13*math.Abs(h1)) || !(math.Abs(cp2/cp1-1) <= 1e-8) {
			t.Errorf("%s: cp/R %.12g and %.12g, h/RT %.15g and %.15g", s, cp1, cp2, h1, h2)
		}
	}
}
