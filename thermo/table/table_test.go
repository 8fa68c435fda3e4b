package table

import (
	"errors"
	"math"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

// An invented oil: round figures that can be worked by hand.
var oil = []Point{{T: 300, Cp: 2000, Density: 900}, {T: 350, Cp: 2200, Density: 860}, {T: 450, Cp: 2500, Density: 780}}

func mustNew(t testing.TB, points []Point, o Options) thermo.Fluid {
	t.Helper()
	return fluidtest.Must(New("oil", "invented", points, o))(t)
}

// air is an ideal gas of R = 287 J/(kg K) at 1 atm, whose cp rises by a parabola.
func air() []Point {
	var out []Point
	for T := 250.0; T <= 700; T += 50 {
		out = append(out, Point{T: T, Cp: airCp(T), Density: 101325 / (287 * T)})
	}
	return out
}

func airCp(T float64) float64 { return 1003 + 2e-4*(T-250)*(T-250) }

// boils is the oil with the vapour pressures of an exact Clausius-Clapeyron line.
func boils(T float64) float64 { return 1e5 * math.Exp(5000*(1/400.-1/T)) }

func boilingOil() []Point {
	out := append([]Point(nil), oil...)
	for k := 1; k < len(out); k++ {
		out[k].VapourPressure = boils(out[k].T)
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
		"gas":      mustNew(t, air(), Options{Phase: thermo.Gas, Pressure: 101325, MolarMass: 0.029, Freezing: 260}),
		"boiling":  mustNew(t, boilingOil(), Options{}),
		"straight": mustNew(t, oil[:2], Options{}),
		"enthalpy": mustNew(t, oil, Options{Enthalpies: []float64{-1e4, 96e3, 330e3}}),
	} {
		t.Run(name, func(t *testing.T) { fluidtest.Run(t, f) })
	}
}

// By hand: the secants of cp are 4 and 3, so the slope at 350 K is (100·4 + 50·3)/150 =
// 11/3 and that at 300 K (200·4 − 50·3)/150 = 13/3, at 450 K (250·3 − 100·4)/150 = 7/3
// J/(kg K²); a cubic between two values of slopes d, e has the area of the trapezoid and (d
// − e) ΔT²/12 beside it.
func TestEnthalpyIsExact(t *testing.T) {
	f := mustNew(t, oil, Options{})
	first := 50*2100 + (13./3-11./3)*2500/12
	second := 100*2350 + (11./3-7./3)*10000/12
	for _, tt := range []struct{ T1, T2, want float64 }{ // K, K, J/kg
		{300, 350, first},
		{350, 450, second},
		{300, 450, first + second},
		{450, 300, -first - second},
	} {
		got, err := thermo.StreamHeat(f, 1, tt.T1, 3e5, tt.T2, 3e5)
		if err != nil || !(math.Abs(got-tt.want) <= 1e-9*math.Abs(tt.want)) {
			t.Errorf("%g to %g K: %.12g J/kg, %v; want %g", tt.T1, tt.T2, got, err, tt.want)
		}
	}
	// In the middle of the last stretch: the mean of the ends and (d − e) ΔT/8. The secants
	// of density are both -0.8 kg/(m³ K), which is a straight line.
	p, err := f.At(400, 3e5)
	if err != nil || !(math.Abs(p.Cp-(2350+(11./3-7./3)*100/8)) <= 1e-9) || !(math.Abs(p.Density-820) <= 1e-9) {
		t.Errorf("at 400 K: %+v, %v; want cp 2366.67, density 820", p, err)
	}
}

// Given enthalpies are met, and cp with them. By hand half-way from 300 to 350 K: the mean
// cp is 106e3/50 = 2120, 20 above that of the ends, so the parabola is 1.5 · 20 above 2100.
func TestEnthalpiesAreMet(t *testing.T) {
	want := []float64{-1e4, 96e3, 330e3}
	f := mustNew(t, oil, Options{Enthalpies: want})
	for k, row := range oil {
		got, err1 := f.At(row.T, 1e5)
		q, err2 := thermo.StreamHeat(f, 1, oil[0].T, 1e5, row.T, 1e5)
		if err := errors.Join(err1, err2); err != nil || !(math.Abs(got.Cp-row.Cp) <= 1e-9) || !(math.Abs(q-(want[k]-want[0])) <= 1e-7) {
			t.Errorf("row %d: cp %g, heat %g, %v; want %g, %g", k+1, got.Cp, q, err, row.Cp, want[k]-want[0])
		}
	}
	if got, err := f.At(325, 1e5); err != nil || !(math.Abs(got.Cp-2130) <= 1e-9) {
		t.Errorf("at 325 K: %+v, %v; want cp 2130", got, err)
	}
}

// Two rows are a straight line, and its enthalpy a trapezoid.
func TestTwoRowsAreStraight(t *testing.T) {
	f := mustNew(t, oil[:2], Options{})
	p, err1 := f.At(330, 1e5)
	q, err2 := thermo.StreamHeat(f, 1, 300, 1e5, 330, 1e5)
	if err := errors.Join(err1, err2); err != nil || !(math.Abs(p.Cp-2120) <= 1e-9) || !(math.Abs(p.Density-876) <= 1e-9) || !(math.Abs(q-30*2060) <= 1e-7) {
		t.Errorf("at 330 K: %+v, heat %g J/kg, %v; want cp 2120, density 876, heat 61800", p, q, err)
	}
}

// Every row is met.
func TestRowsAreMet(t *testing.T) {
	for _, points := range [][]Point{oil, air()} {
		f := mustNew(t, points, Options{})
		for k, row := range points {
			got, err := f.At(row.T, 1e5)
			if err != nil || !(math.Abs(got.Cp/row.Cp-1) <= 1e-14) || !(math.Abs(got.Density/row.Density-1) <= 1e-14) {
				t.Errorf("row %d: %+v, %v; want %+v", k+1, got, err, row)
			}
		}
	}
}

// A constant density has the pressure term v Δp; the middle of the rows, 375 K, has 1/840 ·
// (1 − 375 · 0.8/840) by hand.
func TestPressureTerm(t *testing.T) {
	for _, tt := range []struct {
		fluid thermo.Fluid
		want  float64 // J/kg for 1 MPa
	}{
		{mustNew(t, oil[:1], Options{MinT: 280, MaxT: 400}), 1e6 / 900},
		{mustNew(t, oil, Options{}), 1e6 / 840 * (1 - 375*0.8/840)},
	} {
		got, err := thermo.StreamHeat(tt.fluid, 1, 330, 1e5, 330, 1.1e6)
		if err != nil || !(math.Abs(got-tt.want) <= 1e-6) {
			t.Errorf("%+v: %.9g J/kg, %v; want %.9g", tt.fluid.Bounds(), got, err, tt.want)
		}
	}
}

// A table of an ideal gas agrees with the gas it was drawn from, also at another pressure;
// cp is a parabola, which the cubics meet exactly where rows lie alike, and density
// 101325/(287 T) at a row.
func TestGasFollowsPressure(t *testing.T) {
	f := mustNew(t, air(), Options{Phase: thermo.Gas, Pressure: 101325})
	got, err := f.At(400, 180e3)
	if err != nil {
		t.Fatal(err)
	}
	rho, cp := 180e3/(287*400.), airCp(400)
	if !(math.Abs(got.Density/rho-1) <= 1e-12) || !(math.Abs(got.Cp/cp-1) <= 1e-12) || !(math.Abs(got.Cv/(cp-287)-1) <= 1e-12) {
		t.Errorf("got %+v, want density %g, cp %g, cv %g", got, rho, cp, cp-287)
	}
	q, err := thermo.StreamHeat(f, 1, 260, 1e5, 690, 1e5)
	want := 1003*430 + 2e-4*(440*440*440-10*10*10)/3.
	if err != nil || !(math.Abs(q/want-1) <= 1e-12) {
		t.Errorf("260 to 690 K: %g, %v; want %g J/kg", q, err, want)
	}
}

// The boiling point follows an exact Clausius-Clapeyron line, on which ln p is straight
// over 1/T.
func TestBoilingByVapourPressure(t *testing.T) {
	f := mustNew(t, boilingOil(), Options{})
	if b := f.Bounds(); b.MinP != boils(350) {
		t.Errorf("pressures from %g Pa, want from the first vapour pressure %g Pa", b.MinP, boils(350))
	}
	for T := 350.5; T < 450; T += 0.5 {
		lo, hi := f.Span(boils(T))
		if lo != 0 || !(math.Abs(hi-T) <= 1e-9) {
			t.Errorf("Span(%g Pa) = %g, %.12g K, want 0, %g", boils(T), lo, hi, T)
		}
	}
	if _, hi := f.Span(1.0001 * boils(450)); !math.IsInf(hi, 1) {
		t.Errorf("above the last vapour pressure: boils at %g K, want beyond the table", hi)
	}
	for _, p := range []float64{0, -1, math.NaN(), 1} {
		if _, hi := f.Span(p); hi != 350 {
			t.Errorf("Span(%g Pa) ends at %g K, want the 350 K of the first vapour pressure", p, hi)
		}
	}
	_, err := f.At(420, boils(410))
	e := new(thermo.RangeError)
	if !errors.As(err, &e) || e.Why != "boiling point at this pressure" || !(math.Abs(e.Bound-410) <= 1e-9) {
		t.Errorf("420 K where it boils at 410 K: %v", err)
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

// Stated uncertainties hold at one atmosphere; under pressure what an incompressible liquid
// leaves out of cp comes beside. By hand for rows on the straight line 900 − 0.8 (T − 300
// K): v − T dv/dT is (1 − 300·0.8/900)/900 at 300 K and (1 −
// 450·0.8/780)/780 at 450 K, in m³/kg.
func TestUncertainty(t *testing.T) {
	f := mustNew(t, oil, Options{CpUncertainty: 0.02, DensityUncertainty: 0.03})
	cp, density := f.Uncertainty(300, 101325)
	if cp != 0.02 || density != 0.03 {
		t.Errorf("%g, %g; want 0.02, 0.03", cp, density)
	}
	term := func(T, rho float64) float64 { return (1 - T*0.8/rho) / rho }
	s, err := f.At(375, 101325)
	if err != nil {
		t.Fatal(err)
	}
	want := math.Hypot(0.02, 2e6*(term(300, 900)-term(450, 780))/150/s.Cp/math.Sqrt(3))
	if cp, density = f.Uncertainty(300, 101325+2e6); !(math.Abs(cp-want) <= 1e-12) || density != 0.03 {
		t.Errorf("2 MPa above: %g, %g; want %g, 0.03", cp, density, want)
	}
	if cp, density = mustNew(t, air(), Options{Phase: thermo.Gas, Pressure: 101325}).Uncertainty(300, 2e5); cp != 0.01 || density != 0.01 {
		t.Errorf("gas: %g, %g; want 0.01, 0.01", cp, density)
	}
}
