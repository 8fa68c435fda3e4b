package water

import (
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
)

// Both equations solve the same implicit one, so they invert each other.
func TestSaturationRoundTrip(t *testing.T) {
	for T := 273.15; T < 647; T += 0.37 {
		p, err := SaturationPressure(T)
		if err != nil {
			t.Fatal(err)
		}
		back, err := SaturationTemperature(p)
		if err != nil || math.Abs(back-T) > 1e-8 {
			t.Errorf("%g K gives %g Pa gives %.12g K, %v", T, p, back, err)
		}
	}
}

func TestSaturationRefuses(t *testing.T) {
	for _, T := range []float64{273.149, 647.1, -1, 0, math.NaN(), math.Inf(1), math.Inf(-1)} {
		p, err := SaturationPressure(T)
		if e := new(thermo.RangeError); !errors.As(err, &e) || p != 0 || e.Quantity != "temperature" {
			t.Errorf("SaturationPressure(%g) = %g, %v; want a refusal of the temperature", T, p, err)
		}
	}
	for _, p := range []float64{611.2, 22.065e6, -1, 0, math.NaN(), math.Inf(1), math.Inf(-1)} {
		T, err := SaturationTemperature(p)
		if e := new(thermo.RangeError); !errors.As(err, &e) || T != 0 || e.Quantity != "pressure" {
			t.Errorf("SaturationTemperature(%g) = %g, %v; want a refusal of the pressure", p, T, err)
		}
	}
}

func TestPhaseRefusals(t *testing.T) {
	for _, tt := range []struct {
		name     string
		fluid    thermo.Fluid
		T, p     float64
		quantity string
		bound    float64
		below    bool
		says     string
	}{
		// Saturation pressure and temperature at these states: R7-97(2012), tables 35 and 36.
		{"boiling water", Liquid(), 500, 2.6e6, "pressure", 2.63889776e6, true, `"steam"`},
		{"steam asked of water", Liquid(), 600, 1e5, "pressure", 12.3443146e6, true, `"steam"`},
		{"wet steam", Steam(), 500, 2.7e6, "pressure", 2.63889776e6, false, `"water"`},
		{"water asked of steam", Steam(), 300, 1e5, "pressure", 0.00353658941e6, false, `"water"`},
		{"gas above the critical temperature", Liquid(), 700, 10e6, "temperature", 584.149488, false, `"steam"`},
		{"liquid above the critical pressure", Steam(), 600, 23e6, "temperature", criticalTemperature, true, `"water"`},
		{"compressed hot steam", Steam(), 1100, 51e6, "pressure", 50e6, false, "800 °C"},
		{"critical point", Steam(), criticalTemperature, criticalPressure, "temperature", criticalTemperature, false, "critical point"},
	} {
		_, err := tt.fluid.At(tt.T, tt.p)
		e := new(thermo.RangeError)
		if !errors.As(err, &e) {
			t.Errorf("%s: error %v, want a *thermo.RangeError", tt.name, err)
			continue
		}
		if e.Quantity != tt.quantity || !same(e.Bound, tt.bound) || e.Below != tt.below || !strings.Contains(e.Why, tt.says) {
			t.Errorf("%s: %+v, want %s, bound %g, below %v, %q", tt.name, *e, tt.quantity, tt.bound, tt.below, tt.says)
		}
	}
}

// At saturation both phases stand beside each other, a hair beyond only one.
func TestSaturationBelongsToBoth(t *testing.T) {
	for T := 273.15; T < criticalTemperature-0.01; T += 3.3 {
		p := saturationPressure(T)
		water, err1 := Liquid().At(T, p)
		steam, err2 := Steam().At(T, p)
		if err := errors.Join(err1, err2); err != nil || water.Density <= steam.Density || water.Enthalpy >= steam.Enthalpy {
			t.Errorf("%g K: water %+v, steam %+v, %v", T, water, steam, err)
		}
		if s, err := Liquid().At(T, p*(1-1e-12)); err == nil {
			t.Errorf("%g K: water under the saturation pressure is %+v", T, s)
		}
		if s, err := Steam().At(T, p*(1+1e-12)); err == nil {
			t.Errorf("%g K: steam over the saturation pressure is %+v", T, s)
		}
	}
}

func TestSpan(t *testing.T) {
	for _, tt := range []struct {
		fluid     thermo.Fluid
		p, lo, hi float64
	}{
		{Liquid(), 1e5, 273.15, 372.755919}, // R7-97(2012), table 36
		{Steam(), 1e6, 453.035632, math.Inf(1)},
		{Liquid(), 50e6, 273.15, math.Inf(1)},
		{Liquid(), 600, 273.15, 273.15},
		{Steam(), 600, 273.15, math.Inf(1)},
		{Steam(), 50e6, 647.096, math.Inf(1)},
		{Steam(), 100e6, 647.096, 1073.15},
	} {
		lo, hi := tt.fluid.Span(tt.p)
		if math.Abs(lo-tt.lo) > 1e-5 || hi != tt.hi && math.Abs(hi-tt.hi) > 1e-5 {
			t.Errorf("%s at %g Pa: span %.9g to %.9g K, want %.9g to %.9g", tt.fluid.Name(), tt.p, lo, hi, tt.lo, tt.hi)
		}
	}
}
