package thermo_test

import (
	"testing"

	"heatreeve/thermo"
)

// Density 1000 − 0.5 (T − 300 K), by hand at 400 K: ρ = 950, dv/dT = 0.5/950², so that v −
// T dv/dT is (1 − 400·0.5/950)/950 = 8.31025e-4 m³/kg; at 300 K 8.5e-4, at 500 K
// 8.02469e-4.
func TestIncompressible(t *testing.T) {
	c := thermo.NewIncompressible(400, 300, 500, func(T float64) (rho, slope float64) { return 1000 - 0.5*(T-300), -0.5 })
	got := c.Properties(thermo.Atmosphere+1e6, 5000, 2000, 900)
	want := thermo.Properties{Enthalpy: 5000 + 831.0249307, Cp: 2000, Cv: 2000, Density: 900}
	want.InternalEnergy = want.Enthalpy - 1101325./900
	near(t, "enthalpy", got.Enthalpy, want.Enthalpy, 1e-10)
	near(t, "internal energy", got.InternalEnergy, want.InternalEnergy, 1e-10)
	if got.Cp != want.Cp || got.Cv != want.Cv || got.Density != want.Density {
		t.Errorf("%+v, want %+v", got, want)
	}
	law := c.PressureLaw()
	near(t, "temperature of the term", law.Fixed, 400, 0)
	near(t, "spread", law.Spread, 8.310249307e-4-8.024691358e-4, 1e-6)
	if law.Ideal || law.Within != 0 {
		t.Errorf("law %+v", law)
	}
	near(t, "change of cp for 2 MPa", c.CpChange(thermo.Atmosphere+2e6), 2e6*(8.5e-4-8.024691358e-4)/200, 1e-9)
	near(t, "change of cp for -1e5 Pa", c.CpChange(thermo.Atmosphere-1e5), 1e5*(8.5e-4-8.024691358e-4)/200, 1e-9)
	if c.CpChange(thermo.Atmosphere) != 0 {
		t.Error("cp changes at one atmosphere")
	}
}
