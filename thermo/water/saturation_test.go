package water

import (
	"errors"
	"math"
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
		name  string
		fluid thermo.Fluid
		T, p  float64
		bound float64
		below bool
		why   string
	}{
		// Saturation pressure and temperature at these states: R7-97(2012), tables 35 and 36.
		{"boiling water", Liquid(), 500, 2.6e6, 2.63889776e6, true, "saturation: the water boils"},
		{"wet steam", Steam(), 500, 2.7e6, 2.63889776e6, false, "saturation: the steam condenses"},
		{"near-critical steam", Steam(), 640, 22e6, boundary23Pressure(640), false, "boundary of IAPWS-IF97 region 2 with the near-critical region 3"},
	} {
		_, err := tt.fluid.At(tt.T, tt.p)
		e := new(thermo.RangeError)
		if !errors.As(err, &e) {
			t.Errorf("%s: error %v, want a *thermo.RangeError", tt.name, err)
			continue
		}
		if e.Quantity != "pressure" || !same(e.Bound, tt.bound) || e.Below != tt.below || e.Why != tt.why {
			t.Errorf("%s: %+v, want bound %g, below %v, %q", tt.name, *e, tt.bound, tt.below, tt.why)
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
		{Liquid(), 50e6, 273.15, 623.15},
		{Liquid(), 600, 273.15, 273.15},
		{Steam(), 600, 273.15, math.Inf(1)},
		{Steam(), 100e6, 863.15, math.Inf(1)}, // R7-97(2012), text to equation 5
	} {
		lo, hi := tt.fluid.Span(tt.p)
		if math.Abs(lo-tt.lo) > 1e-5 || hi != tt.hi && math.Abs(hi-tt.hi) > 1e-5 {
			t.Errorf("%s at %g Pa: span %.9g to %.9g K, want %.9g to %.9g", tt.fluid.Name(), tt.p, lo, hi, tt.lo, tt.hi)
		}
	}
}
