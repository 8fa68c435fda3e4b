//go:build services

package water

import (
	"math"
	"math/rand/v2"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

// reference95 asks Debian's python3-iapws for IAPWS-95 (IAPWS R6-95(2018), the
// scientific formulation that IF97 was fitted to): density, h, cp, cv. Its solver
// sometimes returns a density that does not give the pressure back; that is null.
const reference95 = `
import json, sys, warnings
warnings.simplefilter("ignore")
from iapws import IAPWS95
out = []
for T, p in json.load(sys.stdin):
    try:
        s = IAPWS95(T=T, P=p / 1e6)
        if abs(IAPWS95(T=T, rho=s.rho).P * 1e6 / p - 1) > 1e-6:
            raise ValueError(s.rho)
        out.append({"density": s.rho, "enthalpy": s.h * 1e3, "cp": s.cp * 1e3, "cv": s.cv * 1e3})
    except Exception:
        out.append(None)
print(json.dumps(out))
`

// asked is a state with our figures and those of the reference.
type asked struct {
	fluid     thermo.Fluid
	T, p      float64
	got, want thermo.Properties
}

// At random states of every region, cp and density lie within what the
// uncertainty takes for the largest deviation, and h within the largest deviation
// found, rounded up: in region 3 it is that of some hundredths of a kelvin.
func TestLiveAgainstIAPWS95(t *testing.T) {
	tolerance := map[int]float64{1: 260, 2: 450, 3: 600, 5: 400} // of h in J/kg
	type worst struct{ cp, cv, density, h, share float64 }
	found, seen := map[int]worst{}, map[int]int{}
	states := randomStates(rand.New(rand.NewPCG(95, 97)), 100)
	if n := compare(t, states); n < len(states)*99/100 {
		t.Errorf("%d of %d states compared", n, len(states))
	}
	for _, s := range states {
		if s.want == (thermo.Properties{}) {
			continue
		}
		r := region(s.T, s.p)
		dcp, dd := deviation(s.T, s.p, s.fluid.Phase())
		cp, density := math.Abs(s.got.Cp/s.want.Cp-1), math.Abs(s.got.Density/s.want.Density-1)
		h := math.Abs(s.got.Enthalpy - s.want.Enthalpy)
		allowed := tolerance[r]
		if r == 3 {
			allowed += 0.08 * s.got.Cp
		}
		w := found[r]
		found[r] = worst{max(w.cp, cp), max(w.cv, math.Abs(s.got.Cv/s.want.Cv-1)), max(w.density, density), max(w.h, h), max(w.share, cp/dcp, density/dd)}
		seen[r]++
		if cp > dcp || density > dd || h > allowed {
			t.Errorf("region %d, %g K, %g Pa: off by %.2e in cp, %.2e in density, %.0f J/kg; more than %.2e, %.2e or %.0f", r, s.T, s.p, cp, density, h, dcp, dd, allowed)
		}
	}
	for _, r := range []int{1, 2, 3, 5} {
		w := found[r]
		t.Logf("region %d, %d states: largest deviations: cp %.2e, cv %.2e, density %.1e, h %.0f J/kg; %.2f of what is allowed", r, seen[r], w.cp, w.cv, w.density, w.h, w.share)
		if seen[r] < 100 {
			t.Errorf("region %d: %d states, want 100", r, seen[r])
		}
	}
}

// randomStates returns up to 2n states of each region, half of them near
// saturation or the critical point where the region has that.
func randomStates(r *rand.Rand, n int) (out []asked) {
	type kind struct {
		region int
		phase  thermo.Phase
		near   bool
	}
	seen := map[kind]int{}
	for _, f := range []thermo.Fluid{Liquid(), Steam()} {
		for range 500 * n {
			near := r.IntN(2) == 0
			T, p := anywhere(f.Bounds(), r)
			if near {
				T, p = nearby(r)
			}
			s, err := f.At(T, p)
			k := kind{region(T, p), f.Phase(), near}
			if err != nil || seen[k] == n {
				continue
			}
			seen[k]++
			out = append(out, asked{fluid: f, T: T, p: p, got: s})
		}
	}
	return out
}

func anywhere(b thermo.Bounds, r *rand.Rand) (T, p float64) {
	T = b.MinT + r.Float64()*(b.MaxT-b.MinT)
	if r.IntN(2) == 0 {
		return T, b.MaxP * r.Float64()
	}
	return T, b.MaxP * math.Exp(-14*r.Float64())
}

// nearby returns a state by the saturation line, within a fifth of its pressure
// but not so near that the two formulations could take it for different phases,
// or by the critical point.
func nearby(r *rand.Rand) (T, p float64) {
	if r.IntN(3) > 0 {
		T = lowestTemperature + r.Float64()*(criticalTemperature-lowestTemperature)
		x := 0.2*r.Float64() + 1e-3
		if r.IntN(2) == 0 {
			x = -x
		}
		return T, saturationPressure(T) * (1 + x)
	}
	return 623.15 + 100*r.Float64(), 16.5e6 + 20e6*r.Float64()
}

// compare fills in what IAPWS-95 gives, and returns for how many.
func compare(t *testing.T, states []asked) (n int) {
	t.Helper()
	var in [][2]float64
	for _, s := range states {
		in = append(in, [2]float64{s.T, s.p})
	}
	for k, want := range fluidtest.Python[*thermo.Properties](t, "python3-iapws", reference95, in) {
		if want != nil {
			states[k].want = *want
			n++
		}
	}
	return n
}
