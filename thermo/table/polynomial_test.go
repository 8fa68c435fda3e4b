package table

import (
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

// cp and density of an invented liquid, and of an invented gas whose density is a parabola
// through that of an ideal gas.
var (
	liquidCp, liquidDensity = []float64{2000, 3.5, -2e-3}, []float64{900, -0.65, -1e-4, 1e-7}
	gasCp, gasDensity       = []float64{1000, 0.1, 1e-4}, []float64{1.29, -4.2e-3, 8e-6}
	liquidRange             = Options{MinT: 260, MaxT: 520}
	gasRange                = Options{Phase: thermo.Gas, Pressure: 101325, MinT: 270, MaxT: 420}
)

func mustPolynomial(t testing.TB, cp, density []float64, o Options) thermo.Fluid {
	t.Helper()
	return fluidtest.Must(Polynomial("liquid", "invented", cp, density, o))(t)
}

func TestPolynomialConformance(t *testing.T) {
	limited := liquidRange
	limited.Freezing, limited.Boiling = 270, 500
	for name, f := range map[string]thermo.Fluid{
		"liquid":      mustPolynomial(t, liquidCp, liquidDensity, liquidRange),
		"limited":     mustPolynomial(t, liquidCp, liquidDensity, limited),
		"constant":    mustPolynomial(t, liquidCp[:1], liquidDensity[:1], Options{Phase: thermo.Solid, MinT: 200, MaxT: 900}),
		"gas":         mustPolynomial(t, gasCp, gasDensity, gasRange),
		"six degrees": mustPolynomial(t, []float64{2000, 1, 0.01, 1e-4, 1e-6, 1e-9, 1e-11}, liquidDensity, liquidRange),
	} {
		t.Run(name, func(t *testing.T) { fluidtest.Run(t, f) })
	}
}

// By hand at 100 °C: cp = 2000 + 350 − 20, density = 900 − 65 − 1 + 0.1, and from 0 °C ∫cp
// dT = 2000·100 + 3.5·100²/2 − 0.002·100³/3.
func TestPolynomialValues(t *testing.T) {
	f := mustPolynomial(t, liquidCp, liquidDensity, liquidRange)
	p, err := f.At(373.15, 1e5)
	if err != nil || !(math.Abs(p.Cp-2330) <= 1e-9) || !(math.Abs(p.Density-834.1) <= 1e-9) {
		t.Errorf("at 100 °C: %+v, %v; want cp 2330, density 834.1", p, err)
	}
	q, err := thermo.StreamHeat(f, 1, 273.15, 1e5, 373.15, 1e5)
	if want := 2000*100 + 3.5*1e4/2 - 0.002*1e6/3; err != nil || !(math.Abs(q/want-1) <= 1e-12) {
		t.Errorf("0 to 100 °C: %.12g J/kg, %v; want %.12g", q, err, want)
	}
}

// A polynomial drawn as a table of narrow rows is the same fluid.
func TestPolynomialAgreesWithTable(t *testing.T) {
	f := mustPolynomial(t, liquidCp, liquidDensity, liquidRange)
	var rows []Point
	for T := 260.0; T <= 520; T += 5 {
		p, err := f.At(T, 1e5)
		if err != nil {
			t.Fatal(err)
		}
		rows = append(rows, Point{T: T, Cp: p.Cp, Density: p.Density})
	}
	g := mustNew(t, rows, Options{})
	for T1 := 262.0; T1 < 510; T1 += 7 {
		a, err1 := thermo.StreamHeat(f, 1, T1, 1e5, T1+8, 1e5)
		b, err2 := thermo.StreamHeat(g, 1, T1, 1e5, T1+8, 1e5)
		if err1 != nil || err2 != nil || !(math.Abs(a/b-1) <= 1e-9) {
			t.Errorf("%g to %g K: polynomial %.12g, table %.12g J/kg, %v, %v", T1, T1+8, a, b, err1, err2)
		}
	}
}

func TestPolynomialRefuses(t *testing.T) {
	gasWith := func(p float64) Options {
		o := gasRange
		o.Pressure = p
		return o
	}
	for _, tt := range []struct {
		name, source string
		cp, density  []float64
		opts         Options
		want         string
	}{
		{"", "s", liquidCp, liquidDensity, liquidRange, "it has no name"},
		{"oil", "", liquidCp, liquidDensity, liquidRange, "no source is given"},
		{"oil", "s", nil, liquidDensity, liquidRange, "cp has 0 coefficients; want 1 to 7"},
		{"oil", "s", liquidCp, make([]float64, 8), liquidRange, "density has 8 coefficients; want 1 to 7"},
		{"oil", "s", []float64{1, math.NaN()}, liquidDensity, liquidRange, "coefficient 1 of cp is NaN"},
		{"oil", "s", liquidCp, []float64{math.Inf(-1)}, liquidRange, "coefficient 0 of density is -Inf"},
		{"oil", "s", liquidCp, liquidDensity, Options{}, "state the range of temperature"},
		{"oil", "s", liquidCp, liquidDensity, Options{MinT: 260}, "state the range of temperature"},
		{"oil", "s", liquidCp, liquidDensity, Options{MinT: 400, MaxT: 300}, "is empty"},
		{"oil", "s", liquidCp, liquidDensity, Options{MinT: math.NaN(), MaxT: 300}, "both must be finite"},
		{"oil", "s", liquidCp, liquidDensity, Options{MinT: 300, MaxT: 400, Boiling: 290}, "leave nothing"},
		{"oil", "s", liquidCp, liquidDensity, Options{MinT: 300, MaxT: 400, MaxP: -1}, "highest pressure of -1 Pa"},
		{"oil", "s", liquidCp, liquidDensity, Options{MinT: 300, MaxT: 400, Enthalpies: []float64{1}}, "a polynomial has none"},
		{"oil", "s", []float64{100, -1}, liquidDensity, liquidRange, "cp is not above zero at "},
		{"oil", "s", liquidCp, []float64{100, -1}, liquidRange, "density is not above zero at "},
		{"oil", "s", []float64{1 - 1e-9}, liquidDensity, liquidRange, "cp is below 1 J/(kg K) at "},
		{"oil", "s", liquidCp, []float64{1e-4 - 1e-12}, liquidRange, "density is below 0.0001 kg/m³ at "},
		{"oil", "s", liquidCp, liquidDensity, Options{MinT: 0.999, MaxT: 300}, "range of temperature 0.999 K to 300 K; it must lie within 1 K to 1e+06 K"},
		{"oil", "s", liquidCp, liquidDensity, Options{MinT: 300, MaxT: 1.1e6}, "it must lie within 1 K to 1e+06 K"},
		{"oil", "s", []float64{2e6}, liquidDensity, liquidRange, "cp is above 1e+06 J/(kg K) at "},
		{"oil", "s", liquidCp, []float64{1e300, 1e300, 1e300}, liquidRange, "density is above 1e+06 kg/m³ at "},
		// A dip below zero over a tenth of a kelvin, which a coarse grid steps over: (t −
		// 100)² − 0.0025.
		{"oil", "s", []float64{1e4 - 0.0025, -200, 1}, liquidDensity, liquidRange, "cp is not above zero at 373.1"},
		{"gas", "s", gasCp, gasDensity, gasWith(4e5), "cp is no more than p/(ρT)"},
		{"gas", "s", gasCp, gasDensity[:1], gasRange, "density is constant"},
		{"gas", "s", gasCp, []float64{1.29, 0, 0}, gasRange, "density is constant"},
	} {
		if f, err := Polynomial(tt.name, tt.source, tt.cp, tt.density, tt.opts); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("Polynomial(%q, %q, %v, %v, %+v) = %v, %v; want an error with %q", tt.name, tt.source, tt.cp, tt.density, tt.opts, f, err, tt.want)
		}
	}
}

// (t − a)² + c over [0, 100] is above zero for c > 0 however small, and where c < 0 the
// place that is told is not.
func TestAbove(t *testing.T) {
	for _, a := range []float64{-1, 0, 1.7, 33.333, 64, 99.99, 100} {
		for _, c := range []float64{1e-3, 1e-8} {
			square := []float64{a*a + c, -2 * a, 1}
			if at, ok := above(square, 0, 100); !ok {
				t.Errorf("(t − %g)² + %g: refused at %g", a, c, at)
			}
			square[0] -= 2 * c
			at, ok := above(square, 0, 100)
			if a < 0 {
				continue // the double root of t = −1 lies outside
			}
			if ok || !((at-a)*(at-a)-c <= 1e-9) {
				t.Errorf("(t − %g)² − %g: %v at %g", a, c, ok, at)
			}
		}
	}
	if _, ok := above([]float64{math.NaN(), 1, 2}, 0, 1); ok {
		t.Error("not a number passed for above zero")
	}
}

// The hull holds the polynomial, and its ends are the values there.
func TestHull(t *testing.T) {
	c := []float64{3, -2, 5, -7, 1, 0.5, -0.25}
	var f power
	copy(f[:], c)
	b := hull(c, -1.5, 2)
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, v := range b {
		lo, hi = min(lo, v), max(hi, v)
	}
	for x := -1.5; x <= 2; x += 1. / 64 {
		if v := f.at(x); !(v >= lo-1e-12 && v <= hi+1e-12) {
			t.Errorf("%g at %g, outside of %g to %g", v, x, lo, hi)
		}
	}
	if !(math.Abs(b[0]-f.at(-1.5)) <= 1e-12) || !(math.Abs(b[6]-f.at(2)) <= 1e-12) {
		t.Errorf("ends %g, %g; want %g, %g", b[0], b[6], f.at(-1.5), f.at(2))
	}
}
