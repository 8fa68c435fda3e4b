package thermo_test

import (
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/gas"
	"heatreeve/thermo/water"
)

func TestHeatRefuses(t *testing.T) {
	w := water.Liquid()
	air, err := gas.DryAir(gas.Ideal)
	if err != nil {
		t.Fatal(err)
	}
	rigid := func(f thermo.Fluid, V, T1, p1, T2 float64) error {
		_, _, err := thermo.RigidVesselHeat(f, V, T1, p1, T2)
		return err
	}
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
		{rigid(w, 1, 300, 1e5, 310), false, "rigid vessel: water is a liquid"},
		{rigid(air, -1, 300, 1e5, 310), false, "volume of -1 m³"},
		{rigid(air, 1, 100, 1e5, 310), true, "temperature"},
		{rigid(air, 1, 300, 8e5, 900), true, "pressure"},
	} {
		e := new(thermo.RangeError)
		if tt.err == nil || !strings.Contains(tt.err.Error(), tt.want) || errors.As(tt.err, &e) != tt.ranged {
			t.Errorf("error %v, want %q, range error %v", tt.err, tt.want, tt.ranged)
		}
	}
}

// Steam is not ideal: at constant volume the end pressure is found by density.
func TestRigidVesselOfSteam(t *testing.T) {
	s := water.Steam()
	q, p2, err := thermo.RigidVesselHeat(s, 3, 500, 1e6, 700)
	if err != nil {
		t.Fatal(err)
	}
	a, err1 := s.At(500, 1e6)
	b, err2 := s.At(700, p2)
	if err := errors.Join(err1, err2); err != nil {
		t.Fatal(err)
	}
	if !(math.Abs(b.Density/a.Density-1) <= 1e-12) || !(math.Abs(p2/1.4e6-1) >= 0.01) {
		t.Errorf("ends at %g Pa with %g kg/m³, started with %g", p2, b.Density, a.Density)
	}
	near(t, "heat", q, 3*a.Density*(b.InternalEnergy-a.InternalEnergy), 1e-12)
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
