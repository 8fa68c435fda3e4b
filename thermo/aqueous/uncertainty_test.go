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
			if !(math.Abs(cp/wantCp-1) <= 1e-6) || !(math.Abs(rho/wantRho-1) <= 1e-6) || !(cp > cp0 && rho > rho0) {
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
			if !(math.Abs(b.cp-a.cp) <= 0.005) || !(math.Abs(b.density-a.density) <= 0.005) || !(a.cp > 0 && a.density > 0) {
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
	worstCp, worstRho := 0.0, 0.0
	for k := range solutes {
		s := &solutes[k]
		f, trace := mustNew(t, s.name, 0, 0), mustNew(t, s.name, 1e-6, 0)
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
			if !(dCp <= 2*u) || !(dRho <= 2*uRho) {
				t.Errorf("%s at %g K: cp is off by %g, density by %g", f.Name(), T, dCp, dRho)
			}
			if !(math.Abs(near.Cp/got.Cp-1) <= 1e-5) || !(math.Abs(near.Density/got.Density-1) <= 1e-5) {
				t.Errorf("%s at %g K: %+v, with nothing dissolved %+v", trace.Name(), T, near, got)
			}
		}
	}
	t.Logf("worst: cp %.3f %%, density %.3f %%", 100*worstCp, 100*worstRho)
	if !(worstCp <= 0.0069) || !(worstRho <= 0.0014) {
		t.Errorf("off IAPWS-IF97 by %g in cp, %g in density", worstCp, worstRho)
	}
}

// Standard uncertainties by hand from the tables of deviations: glycol of 20 °C, 1.45 % and
// 0.51 %; 20 K below the first row of glycerol's 2 % and 0.5 %, 0.05 % and 0.01 % a kelvin
// more; methanol beyond 20 °C, whose last two rows are 2 % and 2.3 % at 20 K from each
// other, which is less; ammonia at -50 °C half-way from 14.1 % to 18 %.
func TestFitUncertainty(t *testing.T) {
	for _, tt := range []struct {
		solute         string
		T, cp, density float64 // half-widths in per cent
	}{
		{"ethylene glycol", 293.15, 1.45, 0.51},
		{"glycerol", 243.15, 2 + 20*0.05, 0.5 + 20*0.01},
		{"methanol", 303.15, 2.3 + 10*0.05, 0.5 + 10*0.01},
		{"methanol", 253.15, 3 + 10*0.1, 0.5 + 10*0.01},
		{"ammonia", 223.15, (14.1 + 18) / 2, (1.1 + 1.55) / 2},
	} {
		f := mustNew(t, tt.solute, 0.1, 0)
		cp, density := f.Uncertainty(tt.T, 101325)
		wantCp, wantRho := math.Hypot(tt.cp/100/math.Sqrt(3), 0.005), math.Hypot(tt.density/100/math.Sqrt(3), 0.0005)
		if !(math.Abs(cp-wantCp) <= 1e-9) || !(math.Abs(density-wantRho) <= 1e-9) {
			t.Errorf("%s at %g K: %.6f, %.6f; want %.6f, %.6f", tt.solute, tt.T, cp, density, wantCp, wantRho)
		}
	}
}

// What a pressure term from one temperature misses at the others, in kJ/kg per MPa: the
// comment of the package says at most 0.22.
func TestSpreadOfPressureTerm(t *testing.T) {
	worst := 0.0
	for k := range solutes {
		s := &solutes[k]
		for _, x := range []float64{0, s.max / 2, s.max} {
			worst = max(worst, 1e3*s.mix(s.name, x, 0).PressureLaw().Spread)
		}
	}
	if !(worst > 0.2 && worst < 0.22) {
		t.Errorf("up to %.3f kJ/kg per MPa", worst)
	}
}
