package food

import (
	"math"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/water"
)

// The deviations of the water polynomials are what package water shows them to be, from 0
// °C to 150 °C: within 0.0006 of cp and 0.0004 of density.
func TestWaterDeviation(t *testing.T) {
	f := mustNew(t, Composition{Water: 1})
	var worst float64
	for c := 0.0; c <= 150; c += 1.25 {
		T, p := zeroC+c, atm
		if c > 99 {
			p, _ = water.SaturationPressure(T)
			p *= 1.001
		}
		want, err := water.Liquid().At(T, p)
		if err != nil {
			t.Fatal(err)
		}
		got, err := f.At(T, p)
		if err != nil {
			t.Fatal(err)
		}
		cp, density := f.Uncertainty(T, p)
		dCp := math.Sqrt(3)*cp - math.Abs(got.Cp/want.Cp-1)
		dDensity := math.Sqrt(3)*density - math.Abs(got.Density/want.Density-1)
		worst = max(worst, math.Abs(dCp))
		if !(math.Abs(dCp) < 0.0006) || !(dDensity > -0.0004) {
			t.Errorf("%g °C: cp %g of %g, density %g of %g; stated half-widths miss the deviation by %.2g and %.2g", c, got.Cp, want.Cp, got.Density, want.Density, dCp, dDensity)
		}
	}
	t.Logf("stated deviation of cp within %.2g of the true one", worst)
}

// Densities of milk at 20 °C, from memory: whole 1030, skim 1035 kg/m³; of wort of 12 °P
// 1046.5 (specific gravity 1.0484). Ours are lower, within the half-width that we state.
func TestDensityWithinUncertainty(t *testing.T) {
	for name, want := range map[string]float64{"whole milk": 1030, "skim milk": 1035, "beer wort": 1046.5} {
		f := mustProduct(t, name)
		got, err := f.At(293.15, atm)
		_, u := f.Uncertainty(293.15, atm)
		d := math.Abs(got.Density/want - 1)
		t.Logf("%s: %.1f kg/m³, want %g, deviation %.2f %%, stated half-width %.2f %%", name, got.Density, want, 100*d, 100*u*math.Sqrt(3))
		if err != nil || !(d <= u*math.Sqrt(3)) {
			t.Errorf("%s: %+v, %v; want %g", name, got, err, want)
		}
	}
}

// Half-widths by hand. Water: its deviation, 1.08 % of cp at 40 °C. Fat alone: 6 % of cp,
// and 80 kJ/kg over 40 K below that, 2000 of 1984.2 J/(kg K) at 0 °C; 4 % of density. Sugar
// of 70 % and water of 30 % at 40 °C: shares of cp 0.5227 and 0.4773 of 2372.7 J/(kg K), of
// volume 0.4069 and 0.5931.
func TestUncertainty(t *testing.T) {
	for _, tt := range []struct {
		c                      Composition
		celsius, cp, rho, slop float64
	}{
		{Composition{Water: 1}, 40, 0.0108, 0.0011, 1e-12},
		{Composition{Fat: 1}, 0, 0.06 + 2000/1984.2, 0.04, 1e-12},
		{Composition{Fat: 1}, 39.99, 0.06 + 2000/2035.4, 0.04, 1e-4},
		{Composition{Fat: 1}, 40, 0.06, 0.04, 1e-12},
		{Composition{Fat: 1}, 150, 0.06, 0.04, 1e-12},
		{Composition{Water: 0.3, Carbohydrate: 0.7}, 40, 0.5227*0.0108 + 0.4773*0.06, 0.4069*0.0011 + 0.5931*0.08, 1e-5},
	} {
		cp, density := mustNew(t, tt.c).Uncertainty(zeroC+tt.celsius, atm)
		if r := math.Sqrt(3); !(math.Abs(cp*r-tt.cp) <= tt.slop) || !(math.Abs(density*r-tt.rho) <= tt.slop) {
			t.Errorf("%v at %g °C: half-widths %.5f, %.5f; want %.5f, %.5f", tt.c, tt.celsius, cp*r, density*r, tt.cp, tt.rho)
		}
	}
}

// Melting milk fat takes up 80 kJ/kg between 0 °C and 40 °C: a cream's true heat lies
// within the half-width of ours.
func TestMeltingIsCovered(t *testing.T) {
	for name, fraction := range map[string]float64{"cream": 0.4, "whole milk": 0.035} {
		f := mustProduct(t, name)
		ours, err := thermo.StreamHeat(f, 1, 273.15, 3e5, 313.14, 3e5)
		if err != nil {
			t.Fatal(err)
		}
		least := math.Inf(1)
		for T := 273.15; T < 313.14; T += 5 {
			u, _ := f.Uncertainty(T, 3e5)
			least = min(least, u*math.Sqrt(3))
		}
		molten := fraction * 80e3 / ours
		t.Logf("%s: fat adds %.1f %%, half-width from %.1f %%", name, 100*molten, 100*least)
		if !(molten < least) {
			t.Errorf("%s: melting fat adds %.3g of the heat, half-width %.3g", name, molten, least)
		}
	}
}
