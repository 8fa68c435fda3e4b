package water

import (
	"math"
	"testing"

	"heatreeve/thermo"
)

// Where two regions meet, their equations differ a little. The release was made
// so that they differ by less than 0.05 % in v, 0.2 kJ/kg in h and 1 % in cp (the
// "Prague values" that IF97 was held to; from memory).
func TestRegionsMeet(t *testing.T) {
	liquid3 := func(T, p float64) thermo.Properties { s, _ := region3(T, p, thermo.Liquid); return s }
	gas3 := func(T, p float64) thermo.Properties { s, _ := region3(T, p, thermo.Gas); return s }
	for _, tt := range []struct {
		name string
		a, b func(T, p float64) thermo.Properties
		line func(x float64) (T, p float64) // x from 0 to 1
	}{
		{"1 and 3", region1All, liquid3, func(x float64) (T, p float64) {
			s := saturationPressure(region1MaxT)
			return region1MaxT, s + x*(highestP-s)
		}},
		{"2 and 3", region2All, gas3, func(x float64) (T, p float64) {
			T = region1MaxT + x*(boundary23Top-region1MaxT)
			return T, boundary23Pressure(T)
		}},
		{"2 and 5", region2All, region5, func(x float64) (T, p float64) {
			return region2MaxT, 1e3 * math.Pow(region5MaxP/1e3, x)
		}},
	} {
		var v, h, cp float64
		for x := 0.0; x <= 1; x += 1.0 / 256 {
			T, p := tt.line(x)
			a, b := tt.a(T, p), tt.b(T, p)
			v = max(v, math.Abs(a.Density/b.Density-1))
			h = max(h, math.Abs(a.Enthalpy-b.Enthalpy))
			cp = max(cp, math.Abs(a.Cp/b.Cp-1))
		}
		t.Logf("regions %s differ by up to %.2g %% in v, %.0f J/kg in h, %.2g %% in cp", tt.name, 100*v, h, 100*cp)
		if !(v <= 5e-4 && h <= 200 && cp <= 0.01) {
			t.Errorf("regions %s: more than 0.05 %% in v, 200 J/kg in h or 1 %% in cp", tt.name)
		}
	}
}

func TestRegion(t *testing.T) {
	for _, tt := range []struct {
		T, p float64
		want int
	}{
		{300, 1e5, 1}, {300, 1e3, 2}, {300, saturationPressure(300), 4},
		{623.15, 17e6, 1}, {math.Nextafter(623.15, 700), 17e6, 3}, {623.15, 16e6, 2},
		{640, saturationPressure(640), 4}, {640, 21e6, 3}, {640, 20e6, 3}, {640, boundary23Pressure(640), 2},
		{700, boundary23Pressure(700), 2}, {700, math.Nextafter(boundary23Pressure(700), 1e9), 3},
		{863.15, 100e6, 2}, {863.1, 100e6, 3}, {1073.15, 1e6, 2}, {math.Nextafter(1073.15, 2000), 1e6, 5},
	} {
		if got := region(tt.T, tt.p); got != tt.want {
			t.Errorf("region(%.17g K, %g Pa) = %d, want %d", tt.T, tt.p, got, tt.want)
		}
	}
}

// What the short way takes to be in a region has to be there, on both sides of
// the ends of its steps too.
func TestSurelyIsSo(t *testing.T) {
	check := func(T, p float64) {
		if r := region(T, p); isSurely1(T, p) && r != 1 || isSurely2(T, p) && r != 2 {
			t.Errorf("%.17g K, %.17g Pa: taken for region 1 %v, 2 %v, is %d", T, p, isSurely1(T, p), isSurely2(T, p), r)
		}
	}
	for k := range 800 {
		T := lowestTemperature + float64(k)
		for _, T := range []float64{math.Nextafter(T, 0), T, math.Nextafter(T, 1e4), T + 0.4, T + 0.9} {
			if T < lowestTemperature {
				continue
			}
			for _, p := range []float64{saturationPressure(min(T, criticalTemperature)), boundary23Pressure(T), highestP} {
				for _, f := range []float64{0.9, 1 - 1e-9, 1 - 1e-12, 1, 1 + 1e-12, 1 + 1e-9, 1.1} {
					if p*f <= highestP {
						check(T, p*f)
					}
				}
			}
		}
	}
	for _, p := range []float64{math.NaN(), math.Inf(1), math.Inf(-1), 0, -1, 101e6} {
		for _, T := range []float64{300, 900, 1e9, -1, math.NaN(), math.Inf(1), math.Inf(-1)} {
			if isSurely1(T, p) || isSurely2(T, p) {
				t.Errorf("%g K, %g Pa is taken for a state", T, p)
			}
		}
	}
}

// Around the critical point cp is huge, finite, and the derivative of h. The
// step follows how fast cp changes there: a hundredth of a per cent of the
// distance to the critical temperature. Nearer than 10 mK the rounding of the
// density, which the pressure hardly depends on there, shows in the difference.
func TestNearCriticalPoint(t *testing.T) {
	highest := 0.0
	for _, f := range []thermo.Fluid{Liquid(), Steam()} {
		for _, away := range []float64{-5, -0.5, -0.05, -0.005, 0.005, 0.05, 0.5, 5} {
			T := criticalTemperature + away
			for _, x := range []float64{0.9, 0.97, 1, 1.03, 1.1} {
				p := criticalPressure * (1 + (x-1)*math.Abs(away)/5)
				d := math.Abs(away) * 1e-4
				s, err := f.At(T, p)
				below, err1 := f.At(T-d, p)
				above, err2 := f.At(T+d, p)
				if err != nil || err1 != nil || err2 != nil {
					continue // the other phase's
				}
				highest = max(highest, s.Cp)
				slope := (above.Enthalpy - below.Enthalpy) / ((T + d) - (T - d))
				if !(s.Cp > s.Cv && s.Cv > 0 && math.Abs(slope/s.Cp-1) <= max(1e-6, 1e-8/math.Abs(away))) {
					t.Errorf("%s, %g K from the critical point, %g Pa: cp %.9g, ∂h/∂T %.9g, cv %g J/(kg K)", f.Name(), away, p, s.Cp, slope, s.Cv)
				}
			}
		}
	}
	t.Logf("highest cp: %.3g J/(kg K)", highest)
	if highest < 1e6 {
		t.Errorf("highest cp is %g J/(kg K): the states are not near the critical point", highest)
	}
}
