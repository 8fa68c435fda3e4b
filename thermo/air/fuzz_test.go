package air

import (
	"errors"
	"math"
	"testing"

	"heatreeve/thermo"
)

// FuzzHumidityRatio sends any figures: what is accepted is air that is not beyond saturation, whose
// state is worked out, and whose wet bulb lies between its dew point and its temperature.
func FuzzHumidityRatio(f *testing.F) {
	f.Add(byte(thermo.RelativeHumidity), 0.5, 298.15, 101325.0)
	f.Add(byte(thermo.DewPoint), 263.15, 273.15, 80e3)
	f.Add(byte(thermo.WetBulb), 273.15, 281.0, 101325.0)
	f.Add(byte(thermo.HumidityRatio), 0.2, 420.0, 30e3)
	f.Add(byte(thermo.RelativeHumidity), 1.02, 223.15, 300e3)
	f.Add(byte(9), math.NaN(), math.Inf(1), -1.0)
	f.Fuzz(func(t *testing.T, kind byte, value, T, p float64) {
		m := thermo.Moisture{Kind: thermo.MoistureKind(kind), Value: value}
		w, err := HumidityRatio(m, T, p)
		if err != nil {
			if w != 0 {
				t.Errorf("%+v: %g beside an error", m, w)
			}
			return
		}
		if !(w >= 0 && w <= maxRatio) {
			t.Fatalf("%+v at %g K, %g Pa: humidity ratio %g", m, T, p, w)
		}
		rh, err1 := RelativeHumidity(w, T, p)
		dew, err2 := DewPoint(w, p)
		wick, err3 := WetBulb(w, T, p)
		_, err4 := mustMoist(t, w).At(T, p)
		if err := errors.Join(err1, err2, err3, err4); err != nil {
			t.Fatalf("%+v at %g K, %g Pa: %v", m, T, p, err)
		}
		if !(rh <= 1+rounding && dew <= T*(1+1e-11) && dew <= wick*(1+1e-11) && wick <= T) {
			t.Errorf("%+v at %g K, %g Pa: RH %g, dew point %g K, wet bulb %g K", m, T, p, rh, dew, wick)
		}
	})
}
