package water

import (
	"math"
	"os"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

// TestAgainstIAPWS95 compares with the scientific formulation that IF97 was
// fitted to. The tolerances are the largest deviations measured at these
// states, rounded up. Half of the states lie within 7e-6 in density, 0.05 % in cp
// and 70 J/kg in enthalpy for water, 2e-5, 0.015 % and 18 J/kg for steam.
func TestAgainstIAPWS95(t *testing.T) {
	type tolerance struct {
		density, cp, cv float64 // relative
		enthalpy        float64 // J/kg
	}
	fluids := map[string]struct {
		fluid thermo.Fluid
		tolerance
	}{
		"water": {Liquid(), tolerance{density: 4e-5, cp: 1.3e-3, cv: 2.8e-3, enthalpy: 240}},
		"steam": {Steam(), tolerance{density: 1e-4, cp: 1.1e-3, cv: 1.6e-3, enthalpy: 250}},
	}
	seen := map[string]int{}
	for _, r := range states95(t) {
		f := fluids[r.phase]
		p, err := f.fluid.At(r.T, r.p)
		if err != nil {
			t.Errorf("%s %g K, %g Pa: %v", r.phase, r.T, r.p, err)
			continue
		}
		seen[r.phase]++
		for _, c := range []struct {
			name           string
			deviation, tol float64
		}{
			{"density", p.Density/r.density - 1, f.density},
			{"cp", p.Cp/r.cp - 1, f.cp},
			{"cv", p.Cv/r.cv - 1, f.cv},
			{"enthalpy", p.Enthalpy - r.enthalpy, f.enthalpy},
		} {
			if math.Abs(c.deviation) > c.tol {
				t.Errorf("%s %g K, %g Pa: %s is off by %.3g, more than %.3g", r.phase, r.T, r.p, c.name, c.deviation, c.tol)
			}
		}
	}
	if seen["water"] < 50 || seen["steam"] < 50 {
		t.Errorf("compared %v states, want at least 50 of each phase", seen)
	}
}

type state95 struct {
	phase                           string
	T, p, density, enthalpy, cp, cv float64
}

func states95(t *testing.T) []state95 {
	t.Helper()
	var out []state95
	for _, r := range fluidtest.Rows(t, os.DirFS("testdata"), "iapws95.csv") {
		out = append(out, state95{
			phase: r.Text("phase"), T: r.Number("T_K"), p: r.Number("p_Pa"), density: r.Number("rho_kg_per_m3"),
			enthalpy: r.Number("h_J_per_kg"), cp: r.Number("cp_J_per_kgK"), cv: r.Number("cv_J_per_kgK"),
		})
	}
	return out
}
