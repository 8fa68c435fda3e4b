package air

import (
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
	"heatreeve/thermo/water"
)

// IAPWS R14-08 (ice, values from memory) and IAPWS-IF97 (water) are newer than the ASHRAE
// equations, which are the ones psychrometric tables are made with.
func TestSaturationAgainstNewer(t *testing.T) {
	got := fluidtest.Deviations{}
	for T := 274.0; T <= hottest; T += 0.5 {
		want, err := water.SaturationPressure(T)
		if err != nil {
			t.Fatal(err)
		}
		d := saturationPressure(T)/want - 1
		got.Note("water", d)
		if !(math.Abs(d) <= 4e-4) {
			t.Errorf("%g K: %g Pa is off by %.2g from IAPWS-IF97", T, saturationPressure(T), d)
		}
	}
	for _, tt := range []struct{ T, p float64 }{{230, 8.94735}, {250, 76.0145}, {273.16, 611.657}} {
		d := saturationPressure(tt.T)/tt.p - 1
		got.Note("ice", d)
		if !(math.Abs(d) <= 4e-4) {
			t.Errorf("%g K: %g Pa is off by %.2g from %g", tt.T, saturationPressure(tt.T), d, tt.p)
		}
	}
	t.Logf("worst relative deviations: %s", got)
}

// Closed form: the two directions of the saturation line are inverse to each other.
func TestSaturationInverts(t *testing.T) {
	for T := coldest + 0.01; T <= hottest; T += 0.0937 {
		if got := saturationTemperature(saturationPressure(T)); !(math.Abs(got/T-1) <= 1e-12) {
			t.Errorf("%.6f K comes back as %.12f", T, got)
		}
	}
	// Between the two equations at their seam, 1.3e-8 apart, stands the triple point.
	if got := saturationTemperature(triplePressure * (1 + 1e-8)); !(math.Abs(got-triplePoint) <= 1e-6) {
		t.Errorf("%g K at the triple point", got)
	}
	for _, p := range []float64{0, -1, math.NaN(), leastPressure / 2} {
		if got := saturationTemperature(p); got != 0 {
			t.Errorf("%g Pa: %g K, want 0", p, got)
		}
	}
}

// Each way to state a humidity gives the same air back: 15 temperatures above and below freezing,
// 5 humidities, 3 pressures.
func TestWaysToStateHumidityAgree(t *testing.T) {
	seen := 0
	for T := 228.15; T < 370; T += 9.7 {
		for _, rh := range []float64{0.05, 0.3, 0.6, 0.95, 1} {
			for _, p := range []float64{60e3, 101325, 200e3} {
				w, err := HumidityRatio(thermo.Moisture{Kind: thermo.RelativeHumidity, Value: rh}, T, p)
				if err != nil {
					if saturationPressure(T)*rh < 0.28*p {
						t.Error(err)
					}
					continue // hot enough for a humidity ratio above 0.25
				}
				seen++
				back, err1 := RelativeHumidity(w, T, p)
				dew, err2 := DewPoint(w, p)
				wick, err3 := WetBulb(w, T, p)
				if err := errors.Join(err1, err2, err3); err != nil {
					t.Error(err)
					continue
				}
				if !(math.Abs(back-rh) <= 1e-12) || !(dew <= wick*(1+1e-11) && wick <= T) {
					t.Errorf("%g K, RH %g, %g Pa: RH %g, dew point %g K, wet bulb %g K", T, rh, p, back, dew, wick)
				}
				for _, m := range []thermo.Moisture{{Kind: thermo.HumidityRatio, Value: w}, {Kind: thermo.DewPoint, Value: dew}, {Kind: thermo.WetBulb, Value: wick}} {
					if again, err := HumidityRatio(m, T, p); err != nil || !(math.Abs(again/w-1) <= 1e-9) {
						t.Errorf("%g K, RH %g, %g Pa: %+v gives %g, want %g; %v", T, rh, p, m, again, w, err)
					}
				}
			}
		}
	}
	if seen < 150 {
		t.Errorf("only %d states", seen)
	}
}

// About 0 °C a wick of water and one of ice may both balance; the one of water is told.
func TestWetBulbAtFreezing(t *testing.T) {
	const T, p = 280.15, 101325
	water, ice := wickRatio(zero, T, p), wickRatio(math.Nextafter(zero, 0), T, p)
	if !(water < ice) {
		t.Fatalf("water %g, ice %g: no overlap here", water, ice)
	}
	for _, tt := range []struct {
		w      float64
		frozen bool
	}{{water * 0.999, true}, {water, false}, {(water + ice) / 2, false}, {ice * 1.001, false}} {
		got, err := WetBulb(tt.w, T, p)
		if err != nil || math.IsNaN(got) || got < zero != tt.frozen {
			t.Errorf("W = %g: wet bulb %g K, %v; frozen %v", tt.w, got, err, tt.frozen)
		}
	}
}

// Sensors in saturated air read up to 2 % more; that is saturation.
func TestSlightlyAboveSaturation(t *testing.T) {
	const T, p = 288.15, 101325
	saturated, err := HumidityRatio(thermo.Moisture{Kind: thermo.RelativeHumidity, Value: 1}, T, p)
	if err != nil {
		t.Fatal(err)
	}
	for _, m := range []thermo.Moisture{
		{Kind: thermo.RelativeHumidity, Value: 1.004}, {Kind: thermo.RelativeHumidity, Value: noise}, {Kind: thermo.DewPoint, Value: T + 0.2},
		{Kind: thermo.WetBulb, Value: T + 0.1}, {Kind: thermo.HumidityRatio, Value: saturated * 1.015},
	} {
		w, err := HumidityRatio(m, T, p)
		if err != nil || w != saturated {
			t.Errorf("%+v: %g, %v; want %g", m, w, err, saturated)
		}
		if _, err := mustMoist(t, w).At(T, p); err != nil {
			t.Errorf("saturated air is refused at its own dew point: %v", err)
		}
	}
}

func TestHumidityRatioRefuses(t *testing.T) {
	for _, tt := range []struct {
		m    thermo.Moisture
		T, p float64
		want string
	}{
		{thermo.Moisture{Kind: thermo.RelativeHumidity, Value: 1.021}, 298.15, 101325, "relative humidity 102.1 % is outside of 0 to 100 %"},
		{thermo.Moisture{Kind: thermo.RelativeHumidity, Value: -0.01}, 298.15, 101325, "relative humidity -1 %"},
		{thermo.Moisture{Kind: thermo.RelativeHumidity, Value: 45}, 298.15, 101325, "relative humidity 4500 %"},
		{thermo.Moisture{Kind: thermo.RelativeHumidity, Value: math.NaN()}, 298.15, 101325, "relative humidity NaN"},
		{thermo.Moisture{Kind: thermo.RelativeHumidity, Value: 0.8}, 423.15, 101325, "makes a humidity ratio of +Inf"},
		{thermo.Moisture{Kind: thermo.RelativeHumidity, Value: 0.9}, 348.15, 101325, "no more than 0.25"},
		{thermo.Moisture{Kind: thermo.DewPoint, Value: 299.15}, 298.15, 101325, "dew point 26 °C is above the temperature of the air, 25 °C"},
		{thermo.Moisture{Kind: thermo.DewPoint, Value: 12}, 298.15, 101325, "dew point -261.15 °C is outside of -100 °C to 200 °C"},
		{thermo.Moisture{Kind: thermo.DewPoint, Value: math.NaN()}, 298.15, 101325, "dew point NaN"},
		{thermo.Moisture{Kind: thermo.WetBulb, Value: 299.15}, 298.15, 101325, "wet bulb 26 °C is above the temperature of the air, 25 °C"},
		{thermo.Moisture{Kind: thermo.WetBulb, Value: 278.15}, 298.15, 101325, "wet bulb 5 °C is below 8.27"},
		{thermo.Moisture{Kind: thermo.WetBulb, Value: 374.15}, 398.15, 101325, "no wick has that at 101.325 kPa"},
		{thermo.Moisture{Kind: thermo.HumidityRatio, Value: 0.03}, 298.15, 101325, "humidity ratio 30 g/kg at 25 °C is above saturation: relative humidity 147."},
		{thermo.Moisture{Kind: thermo.HumidityRatio, Value: -0.03}, 298.15, 101325, "humidity ratio -0.03 kg/kg is outside of 0 to 0.25"},
		{thermo.Moisture{Value: 0.03}, 298.15, 101325, "unknown kind 0"},
		{thermo.Moisture{Kind: thermo.RelativeHumidity, Value: 0.5}, 198.15, 101325, "moist air: temperature -75 °C is below -50 °C"},
		{thermo.Moisture{Kind: thermo.RelativeHumidity, Value: 0.5}, 298.15, 301e3, "moist air: pressure 301 kPa is above 300 kPa"},
	} {
		if w, err := HumidityRatio(tt.m, tt.T, tt.p); w != 0 || err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("%+v at %g K: %g, %v; want an error with %q", tt.m, tt.T, w, err, tt.want)
		}
	}
	if _, err := WetBulb(0.03, 298.15, 101325); err == nil || !strings.Contains(err.Error(), "above saturation") {
		t.Errorf("wet bulb beyond saturation: %v", err)
	}
	for _, w := range []float64{-1, math.NaN()} {
		if _, err := DewPoint(w, 101325); err == nil {
			t.Errorf("DewPoint(%g)", w)
		}
	}
	if _, err := DewPoint(0.01, 0); err == nil {
		t.Error("DewPoint at no pressure")
	}
}

// What a relative humidity over supercooled water is more than one over ice: 1.10 at -10 °C and
// 1.22 at -20 °C (WMO No. 8, annex on the formulas of Magnus, from memory: 6.112 hPa · exp(17.62
// t/(243.12 + t)) over water, exp(22.46 t/(272.62 + t)) over ice).
func TestOverIce(t *testing.T) {
	for celsius, want := range map[float64]float64{-10: 1.10, -20: 1.22} {
		water := 611.2 * math.Exp(17.62*celsius/(243.12+celsius))
		ice := 611.2 * math.Exp(22.46*celsius/(272.62+celsius))
		w, err := HumidityRatio(thermo.Moisture{Kind: thermo.RelativeHumidity, Value: 1}, zero+celsius, 101325)
		pw := pressureOf(w, 101325)
		if err != nil || !(math.Abs(pw/ice-1) <= 3e-3) || !(math.Abs(water/pw-want) <= 0.005) {
			t.Errorf("%g °C: %.2f Pa at saturation, over ice %.2f Pa, over water %.2f Pa, %v", celsius, pw, ice, water, err)
		}
	}
}
