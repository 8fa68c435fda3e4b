package table

import (
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
)

// refusal is what New must not take, and what its error has to say.
type refusal struct {
	name, source string
	points       []Point
	opts         Options
	want         string
}

func refuses(t *testing.T, faults []refusal) {
	t.Helper()
	for _, tt := range faults {
		if f, err := New(tt.name, tt.source, tt.points, tt.opts); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("New(%q, %q, %v, %+v) = %v, %v; want an error with %q", tt.name, tt.source, tt.points, tt.opts, f, err, tt.want)
		}
	}
}

// bad is the oil with another row k.
func bad(k int, p Point) []Point {
	out := append([]Point(nil), oil...)
	out[k] = p
	return out
}

// vapours is the oil with vapour pressures.
func vapours(pressures ...float64) []Point {
	out := append([]Point(nil), oil...)
	for k, p := range pressures {
		out[k].VapourPressure = p
	}
	return out
}

func TestNewRefusesRows(t *testing.T) {
	refuses(t, []refusal{
		{"", "s", oil, Options{}, "it has no name"},
		{"oil", "", oil, Options{}, "no source is given"},
		{"oil", "s", nil, Options{}, "it has no rows"},
		{"oil", "s", bad(1, Point{T: 300, Cp: 2200, Density: 860}), Options{}, "row 2: temperature 300 K does not rise above the 300 K of row 1"},
		{"oil", "s", bad(2, Point{T: 450, Cp: 0, Density: 780}), Options{}, "row 3: cp of 0 J/(kg K)"},
		{"oil", "s", bad(2, Point{T: 450, Cp: 2500, Density: -1}), Options{}, "row 3: density of -1 kg/m³"},
		{"oil", "s", bad(0, Point{T: -40, Cp: 2000, Density: 900}), Options{}, "row 1: temperature of -40 K"},
		{"oil", "s", bad(1, Point{T: math.NaN(), Cp: 2200, Density: 860}), Options{}, "row 2: temperature of NaN K"},
		{"oil", "s", bad(1, Point{T: 350, Cp: math.Inf(1), Density: 860}), Options{}, "row 2: cp of +Inf"},
	})
}

func TestNewRefusesOptions(t *testing.T) {
	refuses(t, []refusal{
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
		{"oil", "s", oil, Options{CpUncertainty: -0.01}, "uncertainty of cp is -0.01"},
		{"oil", "s", oil, Options{DensityUncertainty: 3}, "uncertainty of density is 3"},
		{"oil", "s", oil, Options{MolarMass: 29}, "molar mass of 29 kg/mol"},
	})
}

func TestNewRefusesExtremes(t *testing.T) {
	refuses(t, []refusal{
		{"oil", "s", bad(0, Point{T: 300, Cp: 2e6, Density: 900}), Options{}, "row 1: cp of 2e+06 J/(kg K); it must be from 1 to 1e+06"},
		{"oil", "s", bad(0, Point{T: 0.999, Cp: 2000, Density: 900}), Options{}, "row 1: temperature of 0.999 K; it must be from 1 to 1e+06"},
		{"oil", "s", bad(0, Point{T: 300, Cp: 0.999, Density: 900}), Options{}, "row 1: cp of 0.999 J/(kg K); it must be from 1 to 1e+06"},
		{"oil", "s", bad(0, Point{T: 300, Cp: 2000, Density: 9.99e-5}), Options{}, "row 1: density of 9.99e-05 kg/m³; it must be from 0.0001 to 1e+06"},
		{"oil", "s", oil, Options{MaxP: 1.001e9}, "highest pressure of 1.001e+09 Pa; it must be above zero and at most 1e+09"},
		{"oil", "s", oil[:1], Options{MinT: 0.5, MaxT: 400}, "it must lie within 1 K to 1e+06 K"},
	})
}

func TestNewRefusesGas(t *testing.T) {
	dip := []Point{{T: 300, Cp: 170, Density: 8}, {T: 310, Cp: 170, Density: 3}, {T: 700, Cp: 170, Density: 0.9}, {T: 710, Cp: 170, Density: 0.9}}
	refuses(t, []refusal{
		{"oil", "s", oil, Options{Phase: thermo.Gas}, "a gas must have one above zero"},
		{"oil", "s", oil[:1], Options{Phase: thermo.Gas, Pressure: 1e5, MinT: 280, MaxT: 400}, "give two rows or more"},
		{"oil", "s", []Point{{T: 300, Cp: 200, Density: 1}, {T: 400, Cp: 200, Density: 0.8}}, Options{Phase: thermo.Gas, Pressure: 1e5}, "row 1: cp 200 J/(kg K) is no more than p/(ρT) = 333.3"},
		{"oil", "s", air(), Options{Phase: thermo.Gas, Pressure: 0.6e9}, "highest pressure of 1.2e+09 Pa"},
		// At every row cv is above zero: ρT is 630 kg K/m³ or more, p/(ρT) 159 or less.
		// From row 2 on the density falls by (1 − u)³, early enough for ρT to come down to
		// 558.
		{"oil", "s", dip, Options{Phase: thermo.Gas, Pressure: 1e5}, "row 2: on the way to row 3, at "},
	})
}

func TestNewRefusesVapourPressures(t *testing.T) {
	refuses(t, []refusal{
		{"oil", "s", vapours(0, 10, 0), Options{}, "row 3: no vapour pressure, though row 2 has one"},
		{"oil", "s", vapours(0, 10, 10), Options{}, "row 3: vapour pressure of 10 Pa does not rise above the 10 Pa before it"},
		{"oil", "s", vapours(0, 10, 10*(1+1e-12)), Options{}, "row 3: vapour pressure of 10.00000000001 Pa does not rise"},
		{"oil", "s", vapours(-1, 10, 20), Options{}, "row 1: vapour pressure of -1 Pa"},
		{"oil", "s", vapours(0, 10, math.NaN()), Options{}, "row 3: vapour pressure of NaN Pa"},
		{"oil", "s", vapours(0, 0, 10), Options{}, "one vapour pressure makes no curve"},
		{"oil", "s", vapours(0, 10, 20), Options{Phase: thermo.Solid}, "vapour pressures are those of a liquid, the phase is solid"},
		{"oil", "s", vapours(0, 10, 20), Options{Boiling: 400}, "boiling point of 400 K beside vapour pressures"},
		{"oil", "s", vapours(0, 1e6, 2e6), Options{MaxP: 1e5}, "no more than the first vapour pressure"},
	})
}

func TestNewRefusesEnthalpies(t *testing.T) {
	refuses(t, []refusal{
		{"oil", "s", oil, Options{Enthalpies: []float64{0, 1e5}}, "2 enthalpies beside 3 rows"},
		{"oil", "s", oil[:1], Options{MinT: 280, MaxT: 320, Enthalpies: []float64{0}}, "1 enthalpies beside 1 rows"},
		{"oil", "s", oil, Options{Enthalpies: []float64{0, 2e4, 3e5}}, "row 2: enthalpies of 0 and 20000 J/kg are not those of a cp of 2000 and 2200 J/(kg K) at 300 and 350 K"},
		{"oil", "s", oil, Options{Enthalpies: []float64{0, 1e5, math.NaN()}}, "row 3: enthalpies of 100000 and NaN J/kg"},
		{"oil", "s", oil, Options{Enthalpies: []float64{0, math.Inf(1), 1e9}}, "row 2: enthalpies of 0 and +Inf J/kg"},
	})
}

// All faults come at once.
func TestNewRefusesAllAtOnce(t *testing.T) {
	_, err := New("oil", "", []Point{{T: 300, Cp: -1, Density: 900}, {T: 290, Cp: 2000}}, Options{MaxP: -1})
	if err == nil {
		t.Fatal("accepted")
	}
	for _, part := range []string{"no source", "row 1: cp", "row 2: density", "row 2: temperature 290 K does not rise", "highest pressure"} {
		if !strings.Contains(err.Error(), part) {
			t.Errorf("error %q lacks %q", err, part)
		}
	}
}

// The least and the largest that is accepted has sound properties.
func TestExtremesAreSound(t *testing.T) {
	for _, p := range []Point{{T: 1, Cp: 1, Density: 1e-4}, {T: 1, Cp: 1e6, Density: 1e6}} {
		q := p
		q.T = 1e6
		sound(t, mustNew(t, []Point{p, q}, Options{MaxP: 1e9}))
	}
	sound(t, mustPolynomial(t, []float64{1}, []float64{1e-4}, Options{MinT: 1, MaxT: 1e6, MaxP: 1e9}))
}
