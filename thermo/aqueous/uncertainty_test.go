package aqueous

import (
	"errors"
	"math"
	"testing"

	"heatreeve/thermo/water"
)

// The uncertainty of the concentration counts by the slope of cp and density at the
// state, here taken as a difference between neighbouring mixtures.
func TestUncertaintyOfConcentration(t *testing.T) {
	for k := range solutes {
		s := &solutes[k]
		const u = 0.01
		x := 0.6 * s.max
		exact, vague := mustNew(t, s.name, x, 0), mustNew(t, s.name, x, u)
		before, after := mustNew(t, s.name, x-1e-5, 0), mustNew(t, s.name, x+1e-5, 0)
		lo, hi := exact.Bounds().MinT+0.1, exact.Bounds().MaxT
		for _, T := range []float64{lo, (lo + hi) / 2, hi} {
			cp0, rho0 := exact.Uncertainty(T, pressure)
			cp, rho := vague.Uncertainty(T, pressure)
			a, err1 := before.At(T, pressure)
			b, err2 := after.At(T, pressure)
			if err := errors.Join(err1, err2); err != nil {
				t.Fatal(err)
			}
			wantCp := math.Hypot(cp0, u*math.Log(b.Cp/a.Cp)/2e-5)
			wantRho := math.Hypot(rho0, u*math.Log(b.Density/a.Density)/2e-5)
			if math.Abs(cp/wantCp-1) > 1e-6 || math.Abs(rho/wantRho-1) > 1e-6 || !(cp > cp0 && rho > rho0) {
				t.Errorf("%s at %g K: %g and %g, want %g and %g", vague.Name(), T, cp, rho, wantCp, wantRho)
			}
		}
	}
}

// The drift of the glycol polynomials in density above 40 °C, and of ethanol in cp
// below 0 °C, shows in the uncertainty; between the tabulated temperatures and
// beyond them it has no steps.
func TestDriftIsInTheUncertainty(t *testing.T) {
	glycol, ethanol := mustNew(t, "ethylene glycol", 0.5, 0), mustNew(t, "ethanol", 0.6, 0)
	_, cool := glycol.Uncertainty(293.15, pressure)
	_, hot := glycol.Uncertainty(353.15, pressure)
	if !(hot > 1.7*cool) {
		t.Errorf("density of %s: %g at 80 °C, %g at 20 °C", glycol.Name(), hot, cool)
	}
	mild, _ := ethanol.Uncertainty(273.15, pressure)
	cold, _ := ethanol.Uncertainty(230, pressure)
	if !(cold > 4*mild) {
		t.Errorf("cp of %s: %g at -43 °C, %g at 0 °C", ethanol.Name(), cold, mild)
	}
	for k := range solutes {
		s := &solutes[k]
		for T := 190.0; T < s.maxT; T += 0.01 {
			a, b := deviationAt(s.deviation, T), deviationAt(s.deviation, T+0.01)
			if math.Abs(b.cp-a.cp) > 0.003 || math.Abs(b.density-a.density) > 0.003 || !(a.cp > 0 && a.density > 0) {
				t.Errorf("%s: %+v, then %+v", s.name, a, b)
			}
		}
	}
}

// With nothing dissolved each of the mixtures is water, and one with next to nothing
// differs from it by next to nothing: cp and density by IAPWS-IF97 at 1 bar (2 bar
// where it would boil), within twice the stated uncertainty and the deviations found.
func TestWaterIsTheLimit(t *testing.T) {
	w := water.Liquid()
	worstCp, worstRho, worstFreezing := 0.0, 0.0, 0.0
	for k := range solutes {
		s := &solutes[k]
		f, trace := mustNew(t, s.name, 0, 0), mustNew(t, s.name, 1e-6, 0)
		worstFreezing = max(worstFreezing, math.Abs(f.Bounds().MinT-273.15))
		for T := 273.17; T <= s.maxT; T += 0.499 {
			p := 1e5
			if T > 370 {
				p = 2e5
			}
			want, err1 := w.At(T, p)
			got, err2 := f.At(T, p)
			near, err3 := trace.At(T, p)
			if err := errors.Join(err1, err2, err3); err != nil {
				t.Fatal(err)
			}
			u, uRho := f.Uncertainty(T, p)
			dCp, dRho := math.Abs(got.Cp/want.Cp-1), math.Abs(got.Density/want.Density-1)
			worstCp, worstRho = max(worstCp, dCp), max(worstRho, dRho)
			if dCp > 2*u || dRho > 2*uRho {
				t.Errorf("%s at %g K: cp is off by %g, density by %g", f.Name(), T, dCp, dRho)
			}
			if math.Abs(near.Cp/got.Cp-1) > 1e-5 || math.Abs(near.Density/got.Density-1) > 1e-5 {
				t.Errorf("%s at %g K: %+v, with nothing dissolved %+v", trace.Name(), T, near, got)
			}
		}
	}
	t.Logf("worst: cp %.3f %%, density %.3f %%, freezing point %.3f K", 100*worstCp, 100*worstRho, worstFreezing)
	if worstCp > 0.0069 || worstRho > 0.0014 || worstFreezing > 0.05 {
		t.Errorf("off IAPWS-IF97 by %g in cp, %g in density, %g K in freezing point", worstCp, worstRho, worstFreezing)
	}
}
