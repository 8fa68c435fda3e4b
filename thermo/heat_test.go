package thermo_test

import (
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/water"
)

func TestHeatRefuses(t *testing.T) {
	w := water.Liquid()
	stream := func(m, T1, p1, T2, p2 float64) error {
		_, err := thermo.StreamHeat(w, m, T1, p1, T2, p2)
		return err
	}
	for _, tt := range []struct {
		err    error
		ranged bool
		want   string
	}{
		{stream(-1, 300, 1e5, 310, 1e5), false, "mass of -1 kg or kg/s: it must be finite and not negative"},
		{stream(math.NaN(), 300, 1e5, 310, 1e5), false, "mass of NaN"},
		{stream(math.Inf(1), 300, 1e5, 310, 1e5), false, "mass of +Inf"},
		{stream(1, 270, 1e5, 310, 1e5), true, "below 0 °C"},
		{stream(1, 300, 1e5, 400, 1e5), true, "saturation"},
	} {
		e := new(thermo.RangeError)
		if tt.err == nil || !strings.Contains(tt.err.Error(), tt.want) || errors.As(tt.err, &e) != tt.ranged {
			t.Errorf("error %v, want %q, range error %v", tt.err, tt.want, tt.ranged)
		}
	}
}

// Splitting a stretch of temperature splits the heat: h is a function of state.
func TestHeatAddsUp(t *testing.T) {
	w := water.Liquid()
	whole, err0 := thermo.StreamHeat(w, 2, 300, 3e5, 390, 4e5)
	one, err1 := thermo.StreamHeat(w, 2, 300, 3e5, 350, 6e5)
	two, err2 := thermo.StreamHeat(w, 2, 350, 6e5, 390, 4e5)
	back, err3 := thermo.StreamHeat(w, 2, 390, 4e5, 300, 3e5)
	if err := errors.Join(err0, err1, err2, err3); err != nil {
		t.Fatal(err)
	}
	near(t, "two steps", one+two, whole, 1e-12)
	near(t, "the way back", back, -whole, 0)
}

// Compressing water by 1 MPa at constant temperature raises its enthalpy by
// 0.941, 0.840 and 0.703 kJ/kg at 20, 60 and 120 °C (computed outside of this
// project with IAPWS-IF97), less than v·Δp.
func TestPressureTermOfWater(t *testing.T) {
	for T, want := range map[float64]float64{293.15: 941, 333.15: 840, 393.15: 703} {
		q, err := thermo.StreamHeat(water.Liquid(), 1, T, 5e5, T, 1.5e6)
		if err != nil || !(math.Abs(q-want) <= 1) {
			t.Errorf("%g K: %.1f J/kg, %v; want %g", T, q, err, want)
		}
	}
}
