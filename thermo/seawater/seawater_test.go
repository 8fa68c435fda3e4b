package seawater

import (
	"errors"
	"fmt"
	"math"
	"os"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
	"heatreeve/thermo/water"
)

func mustNew(t testing.TB, salinity float64) thermo.Fluid {
	t.Helper()
	return fluidtest.Must(New(salinity))(t)
}

func mustAt(t testing.TB, f thermo.Fluid, T, p float64) thermo.Properties {
	t.Helper()
	return fluidtest.Must(f.At(T, p))(t)
}

func TestConformance(t *testing.T) {
	for _, s := range []float64{0, 0.005, 0.035, 0.07, 0.12} {
		f := mustNew(t, s)
		t.Run(f.Name(), func(t *testing.T) { fluidtest.Run(t, f) })
	}
}

// row is a line of testdata/teos10.csv.
type row struct {
	practical, s, T, p, cp, h, rho, sharqawyCp, sharqawyRho, unescoCp float64
}

func rows(t *testing.T) []row {
	t.Helper()
	var out []row
	for _, r := range fluidtest.Rows(t, os.DirFS("testdata"), "teos10.csv") {
		out = append(out, row{
			practical: r.Number("S_practical"), s: r.Number("S"), T: r.Number("T_K"), p: r.Number("p_Pa"), cp: r.Number("cp"), h: r.Number("h"), rho: r.Number("rho"),
			sharqawyCp: r.Number("sharqawy_cp"), sharqawyRho: r.Number("sharqawy_rho"), unescoCp: r.Number("unesco_cp"),
		})
	}
	if len(out) != 80 {
		t.Fatalf("%d rows, want 80", len(out))
	}
	return out
}

// TestAgainstTEOS10 holds every row within the largest deviations that were measured there:
// 0.30 % in cp and 0.052 % in density. The salinity of a row is printed to 5e-7 kg/kg, which is
// worth 0.003 J/(kg K) and 0.0004 kg/m³.
func TestAgainstTEOS10(t *testing.T) {
	got := fluidtest.Deviations{}
	var start row
	for _, r := range rows(t) {
		if r.practical != start.practical || start.T == 0 {
			start = r
		}
		f := mustNew(t, r.s)
		s, one := mustAt(t, f, r.T, r.p), mustAt(t, f, r.T, atmosphere)
		got.Check(t, r, "cp", s.Cp/r.cp-1, 3.0e-3)
		got.Check(t, r, "density", s.Density/r.rho-1, 5.2e-4)
		got.Check(t, r, "correlation of cp in J/(kg K)", one.Cp-r.sharqawyCp, 0.0035)
		got.Check(t, r, "correlation of density in kg/m³", one.Density-r.sharqawyRho, 0.00045)
		got.Check(t, r, "correlation of UNESCO in J/(kg K)", unesco(r.practical, r.T)-r.unescoCp, 0.0006)
		if r.practical > 0 {
			got.Check(t, r, "cp from UNESCO", one.Cp/r.unescoCp-1, 2.05e-3)
		}
		if r.p == atmosphere {
			got.Check(t, r, "UNESCO from TEOS-10", r.unescoCp/r.cp-1, 1.1e-3)
		}
		rise := s.Enthalpy - mustAt(t, f, start.T, start.p).Enthalpy
		if r.T > start.T+5 {
			got.Check(t, r, "rise of h from 0 °C", rise/(r.h-start.h)-1, 3.0e-3)
		}
		cp, density := f.Uncertainty(r.T, r.p)
		if !(math.Sqrt(3)*cp >= math.Abs(s.Cp/r.cp-1)) || !(math.Sqrt(3)*density >= math.Abs(s.Density/r.rho-1)) {
			t.Errorf("%+v: standard uncertainties %g and %g do not cover %+v", r, cp, density, s)
		}
	}
	t.Logf("worst deviations, relative where no unit stands: %s", got)
}

// A rise of pressure by 1 MPa at one temperature, from pairs of rows.
func TestPressureTermAgainstTEOS10(t *testing.T) {
	got := fluidtest.Deviations{}
	all := rows(t)
	for k := 1; k < len(all); k += 2 {
		a, b := all[k-1], all[k]
		if a.T != b.T || a.s != b.s {
			t.Fatalf("rows %d and %d are no pair", k-1, k)
		}
		f := mustNew(t, a.s)
		rise := mustAt(t, f, b.T, b.p).Enthalpy - mustAt(t, f, a.T, a.p).Enthalpy
		got.Check(t, b, "rise of h by pressure", rise/(b.h-a.h)-1, 0.016)
		squeezed := mustAt(t, f, b.T, b.p).Density/mustAt(t, f, a.T, a.p).Density - 1
		got.Check(t, b, "rise of density by pressure", squeezed/(b.rho/a.rho-1)-1, 0.017) // 8e-6 of density
	}
	t.Logf("worst relative deviation: %s", got)
}

// Without salt the correlations must meet water.
func TestFreshWater(t *testing.T) {
	got := fluidtest.Deviations{}
	f, w := mustNew(t, 0), water.Liquid()
	for T := zero; T <= maxT; T += 2.5 {
		for _, p := range []float64{250e3, 1e6, 5e6, maxP} {
			a, b := mustAt(t, f, T, p), mustAt(t, w, T, p)
			at := fmt.Sprintf("%g K, %g Pa", T, p)
			got.Check(t, at, "cp", a.Cp/b.Cp-1, 3.0e-3)
			got.Check(t, at, "cv", a.Cv/b.Cv-1, 6.0e-3)
			got.Check(t, at, "density", a.Density/b.Density-1, 2.2e-4)
		}
	}
	t.Logf("worst relative deviations from IAPWS-IF97: %s", got)
}

// 1000 m³/h of ocean water from 15 °C to 25 °C through a condenser take 11 388.6 kW by TEOS-10.
func TestCondenserCooling(t *testing.T) {
	f := mustNew(t, 0.03516504)
	m := 1000.0 / 3600 * mustAt(t, f, 288.15, atmosphere).Density
	q, err := thermo.StreamHeat(f, m, 288.15, atmosphere, 298.15, atmosphere)
	if err != nil || !(math.Abs(q/11388615-1) <= 3e-3) || !(math.Abs(m/284.99334-1) <= 5.2e-4) {
		t.Errorf("%.0f W at %.4f kg/s, %v", q, m, err)
	}
	t.Logf("duty is off by %.2g, mass flow by %.2g", q/11388615-1, m/284.99334-1)
}

func TestFreezingPoint(t *testing.T) {
	for _, tt := range []struct{ practical, celsius, tolerance float64 }{
		{40, -2.588567 + 0.3765, 1e-6}, // UNESCO 44 at 500 dbar, which lower it by 7.53e-4 K each (from memory)
		{35, -1.922, 0.001},            // common oceanographic tables
		{0, 0, 0},
	} {
		lo, _ := mustNew(t, tt.practical*35.16504/35e3).Span(atmosphere)
		if got := lo - zero - tt.celsius; !(math.Abs(got) <= tt.tolerance) {
			t.Errorf("salinity %g freezes at %.4f °C, want %g", tt.practical, lo-zero, tt.celsius)
		}
	}
}

func TestRefusalNamesTheBound(t *testing.T) {
	f := mustNew(t, 0.035)
	for _, tt := range []struct {
		T, p  float64
		bound float64
		why   string
	}{
		{272, 1e6, zero, validity},
		{394, 1e6, maxT, validity},
		{300, 13e6, maxP, validity},
		{374, atmosphere, 373.124, "boiling point of water at this pressure; seawater boils a little later"},
		{335, 20e3, 333.207, "boiling point of water at this pressure; seawater boils a little later"},
	} {
		_, err := f.At(tt.T, tt.p)
		e := new(thermo.RangeError)
		if !errors.As(err, &e) || e.Why != tt.why || !(math.Abs(e.Bound-tt.bound) <= 2e-3) {
			t.Errorf("%g K, %g Pa: %v; want %g, %q", tt.T, tt.p, err, tt.bound, tt.why)
		}
	}
	if _, hi := f.Span(100); hi != zero {
		t.Errorf("boils at %g K at 100 Pa; there is no liquid", hi)
	}
}

func TestNewRefuses(t *testing.T) {
	for _, s := range []float64{-1e-9, 0.1201, 35, math.NaN(), math.Inf(1)} {
		if f, err := New(s); err == nil || !strings.Contains(err.Error(), "salinity") {
			t.Errorf("New(%g) = %v, %v", s, f, err)
		}
	}
}

// Half-widths as stated.
func TestUncertainty(t *testing.T) {
	for _, tt := range []struct{ s, T, p, cp, density float64 }{
		{0, 300, atmosphere, 3e-3, 5.5e-4},
		{0.042, 313.15, maxP, 3e-3, 5.5e-4},
		{0.042, 313.16, maxP, 3e-3, 1e-3},
		{0.0421, 300, maxP, 3.0064e-3, 1e-3},
		{0.081, 300, 6e6, 4.875e-3, 1e-3},
		{0.12, 300, 0, 5.5e-3, 1e-3},
		{0.12, 350, maxP, 8e-3, 1e-3},
	} {
		cp, density := mustNew(t, tt.s).Uncertainty(tt.T, tt.p)
		if r := math.Sqrt(3); !(math.Abs(cp*r-tt.cp) <= 1e-7) || !(math.Abs(density*r-tt.density) <= 1e-12) {
			t.Errorf("%+v: half-widths %g, %g", tt, cp*r, density*r)
		}
	}
}

// The fall of cp from 1 to 12 MPa in fresh water, some 25 J/(kg K), is within 2 of that of
// IAPWS-IF97 from 20 °C on; at 0 °C it is 34 and should be 52.
func TestFallOfCp(t *testing.T) {
	got := fluidtest.Deviations{}
	f, w := mustNew(t, 0), water.Liquid()
	for T := zero + 20; T <= maxT; T += 10 {
		fall := func(f thermo.Fluid) float64 { return mustAt(t, f, T, 1e6).Cp - mustAt(t, f, T, maxP).Cp }
		got.Check(t, T, "fall of cp in J/(kg K)", fall(f)-fall(w), 2)
	}
	t.Logf("worst: %s", got)
}

// Guards against a slip in what no other check reaches, hot brine under pressure: the figures
// are those of this code, not of a source.
func TestGuard(t *testing.T) {
	for _, tt := range []struct{ s, T, p, cp, density float64 }{
		{0.12, 393.15, 12e6, 3673.387006, 1037.996985}, {0.12, 273.15, 12e6, 3568.570483, 1101.015342}, {0.06, 353.15, 8e6, 3899.829313, 1019.007911},
	} {
		a := mustAt(t, mustNew(t, tt.s), tt.T, tt.p)
		if !(math.Abs(a.Cp/tt.cp-1) <= 1e-8) || !(math.Abs(a.Density/tt.density-1) <= 1e-9) {
			t.Errorf("%+v: %.10g, %.10g", tt, a.Cp, a.Density)
		}
	}
}

func TestRange(t *testing.T) {
	if b := mustNew(t, 0.035).Bounds(); b.MinT != 273.15 || b.MaxT != 393.15 || b.MaxP != 12e6 || !(math.Abs(b.MinP-611.2) <= 0.1) {
		t.Errorf("%+v", b)
	}
}
