package air

import (
	"errors"
	"math"
	"os"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

func mustMoist(t testing.TB, w float64) thermo.Wet {
	t.Helper()
	return fluidtest.Must(Moist(w))(t)
}

func TestConformance(t *testing.T) {
	for _, w := range []float64{0, 1e-5, 0.008, 0.03, 0.1, 0.25} {
		f := mustMoist(t, w)
		t.Run(f.Name(), func(t *testing.T) { fluidtest.Run(t, f) })
	}
	t.Run("live", func(t *testing.T) { fluidtest.Run(t, Live()) })
}

// row is a line of testdata/humid-air.csv.
type row struct {
	T, rh, p, w, h, v, rho, cp, iapwsRho, iapwsCp float64
}

func rows(t *testing.T) []row {
	t.Helper()
	var out []row
	for _, r := range fluidtest.Rows(t, os.DirFS("testdata"), "humid-air.csv") {
		out = append(out, row{
			T: r.Number("T_K"), rh: r.Number("RH"), p: r.Number("p_Pa"), w: r.Number("W"), h: r.Number("h"), v: r.Number("v"), rho: r.Number("rho"), cp: r.Number("cp"),
			iapwsRho: r.Printed("iapws_rho"), iapwsCp: r.Printed("iapws_cp"), // not of dry air
		})
	}
	if len(out) != 90 {
		t.Fatalf("%d rows, want 90", len(out))
	}
	return out
}

// TestAgainstTable holds every row to the digits printed (7e-7 relative) for psychrolib, and to
// the largest deviations from the real mixture that were measured there: 0.16 % in density,
// 1.69 % in cp.
func TestAgainstTable(t *testing.T) {
	tolerance := fluidtest.Deviations{"W": 7e-7, "h": 7e-7, "v": 7e-7, "density": 7e-7, "cp": 7e-7, "cp - cv": 1e-12, "real density": 1.6e-3, "real cp": 1.69e-2}
	got := fluidtest.Deviations{}
	for _, r := range rows(t) {
		w, err := HumidityRatio(thermo.Moisture{Kind: thermo.RelativeHumidity, Value: r.rh}, r.T, r.p)
		if err != nil {
			t.Errorf("%+v: %v", r, err)
			continue
		}
		f := mustMoist(t, w)
		s, err := f.At(r.T, r.p)
		if err != nil {
			t.Errorf("%+v: %v", r, err)
			continue
		}
		dry := 1 + w
		deviations := fluidtest.Deviations{}
		deviations.Note("W", beyondDigits(w-r.w, 0.5e-8)/max(r.w, 1e-3))
		deviations.Note("h", beyondDigits(s.Enthalpy*dry-r.h, 0.005)/max(math.Abs(r.h), 1e3))
		deviations.Note("v", beyondDigits(dry/s.Density-r.v, 0.5e-6)/r.v)
		deviations.Note("density", beyondDigits(s.Density-r.rho, 0.5e-6)/r.rho)
		deviations.Note("cp", beyondDigits(s.Cp*dry-r.cp, 0.005)/r.cp)
		deviations.Note("cp - cv", (s.Cp-s.Cv)*s.Density*r.T/r.p-1) // R of the mixture, by its equation of state
		if !math.IsNaN(r.iapwsRho) {
			deviations.Note("real density", beyondDigits(s.Density-r.iapwsRho, 0.5e-5)/r.iapwsRho)
			deviations.Note("real cp", beyondDigits(s.Cp*dry-r.iapwsCp, 0.005)/r.iapwsCp)
			cp, density := f.Uncertainty(r.T, r.p)
			if !(math.Sqrt(3)*cp >= deviations["real cp"] && math.Sqrt(3)*density >= deviations["real density"]) {
				t.Errorf("%+v: standard uncertainties %g and %g do not cover %v", r, cp, density, deviations)
			}
		}
		for name, d := range deviations {
			got.Note(name, d)
			if !(d <= tolerance[name]) {
				t.Errorf("%g K, RH %g, %g Pa: %s is off by %.3g, more than %g", r.T, r.rh, r.p, name, d, tolerance[name])
			}
		}
	}
	t.Logf("worst relative deviations: %s", got)
}

// The worst corners of the range, as the package comment tells them, against IAPWS G8-10 evaluated
// by python3-iapws 1.5: the deviations are those, and √3 times the standard uncertainty covers
// them.
func TestWorstCorners(t *testing.T) {
	for _, tt := range []struct {
		T, p, w     float64 // K, Pa
		cp, density float64 // of the real mixture
		dCp, dRho   float64 // %
	}{
		{368.65, 300e3, 0.25, 1223.740003, 2.539011275, -3.84, -0.44},
		{369.15, 300e3, 0.25, 1223.347943, 2.535482208, -3.80, -0.44},
		{223.15, 300e3, 0, 1012.483073, 4.705330026, -0.64, -0.46},
		{473.15, 101325, 0.25, 1210.206825, 0.665373328, -2.76, -0.03},
		{468.15, 101325, 0.25, 1209.090296, 0.6724977714, -2.67, -0.03},
		{343.15, 101325, 0.25, 1202.836572, 0.9191985027, -2.16, -0.22},
	} {
		f := mustMoist(t, tt.w)
		s, err := f.At(tt.T, tt.p)
		cp, density := f.Uncertainty(tt.T, tt.p)
		dCp, dRho := s.Cp/tt.cp-1, s.Density/tt.density-1
		if err != nil || !(math.Abs(100*dCp-tt.dCp) <= 0.006) || !(math.Abs(100*dRho-tt.dRho) <= 0.006) {
			t.Errorf("%g K, %g Pa, W %g: cp %.3f %% and density %.3f %% off, want %g and %g; %v", tt.T, tt.p, tt.w, 100*dCp, 100*dRho, tt.dCp, tt.dRho, err)
		}
		if !(math.Abs(dCp) <= math.Sqrt(3)*cp) || !(math.Abs(dRho) <= math.Sqrt(3)*density) {
			t.Errorf("%g K, %g Pa, W %g: uncertainties %.3f %% and %.3f %%", tt.T, tt.p, tt.w, 100*cp, 100*density)
		}
	}
}

// beyondDigits takes off what the last digit printed may be off by.
func beyondDigits(d, half float64) float64 { return math.Max(math.Abs(d)-half, 0) }

// Below the dew point At refuses and Sensible goes on with the same line.
func TestSensibleBelowTheDewPoint(t *testing.T) {
	f := mustMoist(t, 0.01)
	dew, _ := f.Span(101325)
	if !(math.Abs(dew-zero-14.04) <= 0.02) { // 10 g/kg at 101.325 kPa, read off a psychrometric chart
		t.Errorf("dew point %g °C", dew-zero)
	}
	_, err := f.At(dew-1, 101325)
	e := new(thermo.RangeError)
	if !errors.As(err, &e) || e.Why != "dew or frost point" || e.Bound != dew || !e.Below {
		t.Errorf("At below the dew point: %v", err)
	}
	s, err := f.Sensible(dew-1, 101325)
	above, err2 := f.At(dew+1, 101325)
	if err := errors.Join(err, err2); err != nil {
		t.Fatal(err)
	}
	if d := above.Enthalpy - s.Enthalpy; !(math.Abs(d-2*s.Cp) <= 1e-8) {
		t.Errorf("2 K across the dew point take %g J/kg, want cp times 2 K = %g", d, 2*s.Cp)
	}
}

func TestMoistRefuses(t *testing.T) {
	for _, w := range []float64{-1e-9, 0.2501, 8, math.NaN(), math.Inf(1)} {
		if f, err := Moist(w); err == nil || !strings.Contains(err.Error(), "humidity ratio") {
			t.Errorf("Moist(%g) = %v, %v", w, f, err)
		}
	}
}

func TestLiveCarries(t *testing.T) {
	f, err := Live().Carrying(thermo.Moisture{Kind: thermo.RelativeHumidity, Value: 0.5}, 298.15, 101325)
	if err != nil || f.Name() != "moist air 9.881 g/kg" { // 9.88 g/kg on every psychrometric chart
		t.Errorf("25 °C, 50 %%: %v, %v", f, err)
	}
	if f, err := Live().Carrying(thermo.Moisture{Kind: thermo.DewPoint, Value: 300}, 290, 101325); f != nil || err == nil {
		t.Errorf("a dew point above the temperature: %v, %v", f, err)
	}
	if Live().Name() != "moist air" {
		t.Errorf("name %q", Live().Name())
	}
}
