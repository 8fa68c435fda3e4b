package air

import (
	"errors"
	"math"
	"testing"

	"heatreeve/thermo"
)

func airOf(t *testing.T, kind thermo.MoistureKind, value, T, p float64) (thermo.Wet, float64) {
	t.Helper()
	w, err := HumidityRatio(thermo.Moisture{Kind: kind, Value: value}, T, p)
	if err != nil {
		t.Fatal(err)
	}
	return mustMoist(t, w), w
}

// ASHRAE Handbook Fundamentals, chapter 1, example of air at 40 °C with a wet bulb of 20 °C,
// read off the chart (from memory): W = 6.5 g/kg, h = 56.7 kJ and v = 0.896 m³ per kg of dry
// air, dew point 7 °C, relative humidity 14 %. Tolerances are what a chart can be read to; W is
// the coarsest, as the h of the example goes with a W of 6.4.
func TestChartExample(t *testing.T) {
	const T, p = 313.15, 101325
	f, w := airOf(t, thermo.WetBulb, 293.15, T, p)
	s, err1 := f.At(T, p)
	dew, err2 := DewPoint(w, p)
	rh, err3 := RelativeHumidity(w, T, p)
	if err := errors.Join(err1, err2, err3); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name                 string
		got, want, tolerance float64
	}{
		{"W in g/kg", 1e3 * w, 6.5, 0.11},
		{"h in kJ/kg of dry air", s.Enthalpy * (1 + w) / 1e3, 56.7, 0.3},
		{"v in m³/kg of dry air", (1 + w) / s.Density, 0.896, 0.0015},
		{"dew point in °C", dew - zero, 7, 1},
		{"relative humidity in %", 100 * rh, 14, 0.5},
	} {
		if !(math.Abs(c.got-c.want) <= c.tolerance) {
			t.Errorf("%s: %.4g, want %g ± %g", c.name, c.got, c.want, c.tolerance)
		}
	}
}

// Air of 30 °C and 45 % metered at 3600 m³/h and cooled to 18 °C, its dew point just below: -14
// 096.7 W by the relations per kilogram of dry air, of which 1.14247 kg/s flow. The meter's
// flow taken as moist air must come to the same duty.
func TestCoolingAtConstantRatio(t *testing.T) {
	const p = 101325
	f, w := airOf(t, thermo.RelativeHumidity, 0.45, 303.15, p)
	in, err := f.At(303.15, p)
	if err != nil {
		t.Fatal(err)
	}
	m := in.Density // kg/s, for 1 m³/s
	q, err := thermo.StreamHeat(f, m, 303.15, p, 291.15, p)
	if err != nil || !(math.Abs(q/-14096.746-1) <= 1e-6) || !(math.Abs(m/(1+w)/1.1424726-1) <= 1e-6) {
		t.Errorf("%.3f W, %.7f kg/s of dry air, %v", q, m/(1+w), err)
	}
}

// ASHRAE Handbook Fundamentals, chapter 1, example (from memory): 10 m³/s of air saturated at
// 2 °C are heated to 40 °C; from the chart 12.76 kg/s of dry air (a volume of 0.784 m³/kg read
// within 0.0015) and 491 kW, by the relations 490.9 kW.
func TestHeatingOfSaturatedAir(t *testing.T) {
	const p = 101325
	f, w := airOf(t, thermo.RelativeHumidity, 1, 275.15, p)
	in, err := f.At(275.15, p)
	if err != nil {
		t.Fatal(err)
	}
	m := 10 * in.Density
	q, err := thermo.StreamHeat(f, m, 275.15, p, 313.15, p)
	if err != nil || !(math.Abs(q-490.9e3) <= 0.1e3) || !(math.Abs(m/(1+w)-12.76) <= 0.025) {
		t.Errorf("%.1f W, %.4f kg/s of dry air, %v", q, m/(1+w), err)
	}
}
