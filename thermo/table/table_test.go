package table

import (
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
	"heatreeve/thermo/gas"
)

// An invented oil: round figures that can be worked by hand.
var oil = []Point{{300, 2000, 900}, {350, 2200, 860}, {450, 2500, 780}}

func mustNew(t testing.TB, points []Point, o Options) thermo.Fluid {
	t.Helper()
	f, err := New("oil", "invented", points, o)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

// air at 1 atm as a table, from package gas.
func air(t testing.TB) []Point {
	t.Helper()
	var out []Point
	for T := 250.0; T <= 700; T += 50 {
		p, err := gas.DryAir().At(T, 101325)
		if err != nil {
			t.Fatal(err)
		}
		out = append(out, Point{T, p.Cp, p.Density})
	}
	return out
}

func TestConformance(t *testing.T) {
	for name, f := range map[string]thermo.Fluid{
		"liquid":   mustNew(t, oil, Options{}),
		"limits":   mustNew(t, oil, Options{Freezing: 310, Boiling: 420, MaxP: 1e6}),
		"narrow":   mustNew(t, oil, Options{MinT: 320, MaxT: 440}),
		"solid":    mustNew(t, oil, Options{Phase: thermo.Solid, Boiling: 440}),
		"constant": mustNew(t, oil[:1], Options{MinT: 280, MaxT: 400}),
		"gas":      mustNew(t, air(t), Options{Phase: thermo.Gas, Pressure: 101325, MolarMass: 0.029, Freezing: 260}),
	} {
		t.Run(name, func(t *testing.T) { fluidtest.Run(t, f) })
	}
}

// The enthalpy is the area under the broken line of cp: trapezoids, by hand.
func TestEnthalpyIsExact(t *testing.T) {
	f := mustNew(t, oil, Options{})
	for _, tt := range []struct{ T1, T2, want float64 }{ // K, K, J/kg
		{300, 350, 50 * 2100},
		{350, 450, 100 * 2350},
		{300, 450, 50*2100 + 100*2350},
		{325, 400, 25*(2100+2200)/2 + 50*(2200+2350)/2},
		{450, 300, -(50*2100 + 100*2350)},
	} {
		got, err := thermo.StreamHeat(f, 1, tt.T1, 3e5, tt.T2, 3e5)
		if err != nil || math.Abs(got-tt.want) > 1e-9*math.Abs(tt.want) {
			t.Errorf("%g to %g K: %.12g J/kg, %v; want %g", tt.T1, tt.T2, got, err, tt.want)
		}
	}
	p, err := f.At(400, 3e5)
	if err != nil || p.Cp != 2350 || p.Density != 820 {
		t.Errorf("at 400 K: %+v, %v; want cp 2350, density 820", p, err)
	}
}

// A constant density has the pressure term v Δp; the middle of the rows, 375 K,
// has 1/840 · (1 − 375 · 0.8/840) by hand.
func TestPressureTerm(t *testing.T) {
	for _, tt := range []struct {
		fluid thermo.Fluid
		want  float64 // J/kg for 1 MPa
	}{
		{mustNew(t, oil[:1], Options{MinT: 280, MaxT: 400}), 1e6 / 900},
		{mustNew(t, oil, Options{}), 1e6 / 840 * (1 - 375*0.8/840)},
	} {
		got, err := thermo.StreamHeat(tt.fluid, 1, 330, 1e5, 330, 1.1e6)
		if err != nil || math.Abs(got-tt.want) > 1e-6 {
			t.Errorf("%+v: %.9g J/kg, %v; want %.9g", tt.fluid.Bounds(), got, err, tt.want)
		}
	}
}

// A table of air agrees with the formulation it was drawn from, also at another
// pressure; between the rows it misses what a straight line misses.
func TestGasFollowsPressure(t *testing.T) {
	f := mustNew(t, air(t), Options{Phase: thermo.Gas, Pressure: 101325})
	got, err1 := f.At(400, 180e3)
	want, err2 := gas.DryAir().At(400, 180e3)
	if err := errors.Join(err1, err2); err != nil {
		t.Fatal(err)
	}
	if math.Abs(got.Density/want.Density-1) > 1e-12 || math.Abs(got.Cp/want.Cp-1) > 1e-12 || math.Abs(got.Cv/want.Cv-1) > 1e-12 {
		t.Errorf("got %+v, want %+v", got, want)
	}
	a, err1 := thermo.StreamHeat(f, 1, 260, 1e5, 690, 1e5)
	b, err2 := thermo.StreamHeat(gas.DryAir(), 1, 260, 1e5, 690, 1e5)
	if err := errors.Join(err1, err2); err != nil || math.Abs(a/b-1) > 2e-4 {
		t.Errorf("260 to 690 K: %g, want %g J/kg, %v", a, b, err)
	}
}

func TestNewRefuses(t *testing.T) {
	bad := func(k int, p Point) []Point {
		out := append([]Point(nil), oil...)
		out[k] = p
		return out
	}
	for _, tt := range []struct {
		name, source string
		points       []Point
		opts         Options
		want         string
	}{
		{"", "s", oil, Options{}, "it has no name"},
		{"oil", "", oil, Options{}, "no source is given"},
		{"oil", "s", nil, Options{}, "it has no rows"},
		{"oil", "s", bad(1, Point{300, 2200, 860}), Options{}, "row 2: temperature 300 K does not rise above the 300 K of row 1"},
		{"oil", "s", bad(2, Point{450, 0, 780}), Options{}, "row 3: cp of 0 J/(kg K)"},
		{"oil", "s", bad(2, Point{450, 2500, -1}), Options{}, "row 3: density of -1 kg/m³"},
		{"oil", "s", bad(0, Point{-40, 2000, 900}), Options{}, "row 1: temperature of -40 K"},
		{"oil", "s", bad(1, Point{math.NaN(), 2200, 860}), Options{}, "row 2: temperature of NaN K"},
		{"oil", "s", bad(1, Point{350, math.Inf(1), 860}), Options{}, "row 2: cp of +Inf"},
		{"oil", "s", oil[:1], Options{}, "state the range of temperature that it holds for"},
		{"oil", "s", oil[:1], Options{MinT: 310, MaxT: 400}, "row 1: temperature 300 K lies outside the stated range"},
		{"oil", "s", oil, Options{MinT: 290}, "goes beyond the rows, 300 K to 450 K"},
		{"oil", "s", oil, Options{MinT: 400, MaxT: 350}, "is empty"},
		{"oil", "s", oil, Options{MaxT: math.NaN()}, "both must be finite"},
		{"oil", "s", oil, Options{Freezing: 460}, "leave nothing"},
		{"oil", "s", oil, Options{Boiling: 290}, "leave nothing"},
		{"oil", "s", oil, Options{Freezing: 400, Boiling: 350}, "leave nothing"},
		{"oil", "s", oil, Options{MaxP: -1}, "highest pressure of -1 Pa"},
		{"oil", "s", oil, Options{Phase: 9}, "phase Phase(9) is unknown"},
		{"oil", "s", oil, Options{Pressure: 1e5}, "a gas must have one above zero"},
		{"oil", "s", oil, Options{Phase: thermo.Gas}, "a gas must have one above zero"},
		{"oil", "s", oil[:1], Options{Phase: thermo.Gas, Pressure: 1e5, MinT: 280, MaxT: 400}, "give two rows or more"},
		{"oil", "s", []Point{{300, 200, 1}, {400, 200, 0.8}}, Options{Phase: thermo.Gas, Pressure: 1e5}, "row 1: cp 200 J/(kg K) is no more than p/(ρT) = 333.3"},
		{"oil", "s", oil, Options{CpUncertainty: -0.01}, "uncertainty of cp is -0.01"},
		{"oil", "s", oil, Options{DensityUncertainty: 3}, "uncertainty of density is 3"},
		{"oil", "s", oil, Options{MolarMass: 29}, "molar mass of 29 kg/mol"},
	} {
		if f, err := New(tt.name, tt.source, tt.points, tt.opts); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("New(%q, %q, %v, %+v) = %v, %v; want an error with %q", tt.name, tt.source, tt.points, tt.opts, f, err, tt.want)
		}
	}
}

// All faults come at once.
func TestNewRefusesAllAtOnce(t *testing.T) {
	_, err := New("oil", "", []Point{{300, -1, 900}, {290, 2000, 0}}, Options{MaxP: -1})
	if err == nil {
		t.Fatal("accepted")
	}
	for _, part := range []string{"no source", "row 1: cp", "row 2: density", "row 2: temperature 290 K does not rise", "highest pressure"} {
		if !strings.Contains(err.Error(), part) {
			t.Errorf("error %q lacks %q", err, part)
		}
	}
}

func TestRefusalNamesTheLimit(t *testing.T) {
	f := mustNew(t, oil, Options{Freezing: 310, Boiling: 420})
	for T, why := range map[float64]string{305: "freezing point as stated", 430: "boiling point as stated", 460: "range of the table"} {
		_, err := f.At(T, 3e5)
		e := new(thermo.RangeError)
		if !errors.As(err, &e) || e.Why != why {
			t.Errorf("%g K: %v, want %q", T, err, why)
		}
	}
}

// The caller's slice stays the caller's.
func TestRowsAreCopied(t *testing.T) {
	points := append([]Point(nil), oil...)
	f := mustNew(t, points, Options{})
	before, _ := f.At(340, 3e5)
	points[0] = Point{}
	if after, _ := f.At(340, 3e5); after != before {
		t.Errorf("changed from %+v to %+v", before, after)
	}
}

var sink float64

func BenchmarkTable(b *testing.B) {
	f := mustNew(b, air(b), Options{Phase: thermo.Gas, Pressure: 101325})
	b.ReportAllocs()
	T := 333.0
	for b.Loop() {
		s, _ := f.At(T, 101325)
		sink += s.Enthalpy + s.Density + s.Cp
		T += 1e-9 // never the same state twice
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N), "ns/state")
}
