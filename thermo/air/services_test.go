//go:build services

package air

import (
	"math"
	"math/rand/v2"
	"os/exec"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

// state of moist air as the outside programs read it.
type state struct {
	T  float64 `json:"T"` // K
	P  float64 `json:"p"` // Pa
	RH float64 `json:"rh"`
	W  float64 `json:"W"` // kg/kg of dry air
}

// randomStates spreads states over the whole range, half of them where air may hold
// much vapour, at any humidity up to the range's or saturation.
func randomStates(t *testing.T, n int) []state {
	t.Helper()
	r := rand.New(rand.NewPCG(20, 5))
	var out []state
	for len(out) < n {
		s := state{T: 223.15 + 250*r.Float64(), P: 20e3 * math.Pow(15, r.Float64()), RH: r.Float64()}
		if len(out)%2 == 0 {
			s.T = 293.15 + 80*r.Float64()
		}
		if most := pressureOf(maxRatio, s.P) / saturationPressure(s.T); most < 1 {
			s.RH *= most
		}
		var err error
		if s.W, err = HumidityRatio(thermo.Moisture{Kind: thermo.RelativeHumidity, Value: s.RH}, s.T, s.P); err != nil {
			t.Fatal(err)
		}
		out = append(out, s)
	}
	return out
}

const psychrolibScript = `
const p = require('psychrolib');
p.SetUnitSystem(p.SI);
const states = JSON.parse(require('fs').readFileSync(0));
console.log(JSON.stringify(states.map(s => {
	const t = s.T - 273.15;
	return {
		saturation: p.GetSatVapPres(t), w: p.GetHumRatioFromRelHum(t, s.rh, s.p), rh: p.GetRelHumFromHumRatio(t, s.W, s.p),
		h: p.GetMoistAirEnthalpy(t, s.W), v: p.GetMoistAirVolume(t, s.W, s.p), rho: p.GetMoistAirDensity(t, s.W, s.p),
		dew: p.GetTDewPointFromHumRatio(t, s.W, s.p) + 273.15, wick: p.GetTWetBulbFromHumRatio(t, s.W, s.p) + 273.15,
	};
})));
`

// psychrometrics are what psychrolib says of a state.
type psychrometrics struct{ Saturation, W, RH, H, V, Rho, Dew, Wick float64 }

// TestAgainstPsychrolib compares with the npm package psychrolib 1.1.1. It solves dew point and
// wet bulb to 1 mK and takes no humidity ratio below 1e-7; all else is closed form.
func TestAgainstPsychrolib(t *testing.T) {
	dir := t.TempDir()
	install := exec.Command("npm", "install", "--prefix", dir, "--no-audit", "--no-fund", "psychrolib@1.1.1")
	if out, err := install.CombinedOutput(); err != nil {
		t.Fatalf("npm (Debian's packages npm and nodejs) cannot install psychrolib: %v\n%s", err, out)
	}
	node := exec.Command("node", "-e", psychrolibScript)
	node.Dir = dir
	states := randomStates(t, 4000)
	got, wicks := fluidtest.Deviations{}, 0
	for k, r := range fluidtest.Ask[psychrometrics](t, "node (Debian's package nodejs) with psychrolib", node, states) {
		s := states[k]
		if s.W < 1e-7 {
			continue
		}
		a, err := mustMoist(t, s.W).At(s.T, s.P)
		if err != nil {
			t.Error(err)
			continue
		}
		rh, err1 := RelativeHumidity(s.W, s.T, s.P)
		dew, err2 := DewPoint(s.W, s.P)
		if err1 != nil || err2 != nil {
			t.Errorf("%+v: %v, %v", s, err1, err2)
		}
		dry := 1 + s.W
		got.Check(t, s, "saturation", saturationPressure(s.T)/r.Saturation-1, 1e-12)
		got.Check(t, s, "W", s.W/r.W-1, 1e-12)
		got.Check(t, s, "relative humidity", rh/r.RH-1, 1e-12)
		got.Check(t, s, "h", (a.Enthalpy*dry-r.H)/max(math.Abs(r.H), 1e3), 1e-12)
		got.Check(t, s, "v", dry/a.Density/r.V-1, 1e-12)
		got.Check(t, s, "density", a.Density/r.Rho-1, 1e-12)
		got.Check(t, s, "dew point in K", dew-r.Dew, 1e-3)
		if saturationPressure(s.T) < s.P { // its bisection starts from a wick at air temperature
			wicks++
			checkWick(t, got, s, r.Wick)
		}
	}
	if wicks < 2000 {
		t.Errorf("%d wet bulbs compared, want 2000", wicks)
	}
	t.Logf("worst deviations at %d states, relative where no unit stands: %s", len(states), got)
}

// checkWick compares wet bulbs. About 0 °C there may be two, one of water and one of ice, of which
// psychrolib meets either; its wick must then balance within the step that it solves to.
func checkWick(t *testing.T, got fluidtest.Deviations, s state, theirs float64) {
	t.Helper()
	ours, err := WetBulb(s.W, s.T, s.P)
	if err != nil {
		t.Errorf("%+v: %v", s, err)
		return
	}
	if ours >= zero && theirs < zero {
		below, above := wickRatio(theirs-1e-3, s.T, s.P), wickRatio(theirs+1e-3, s.T, s.P)
		if !(below <= s.W && s.W <= max(above, wickRatio(math.Nextafter(zero, 0), s.T, s.P))) {
			t.Errorf("%+v: psychrolib's wet bulb of %g K has W from %g to %g", s, theirs, below, above)
		}
		return
	}
	got.Check(t, s, "wet bulb in K", ours-theirs, 1e-3)
}

const humidAirScript = `
import json, sys, warnings
warnings.simplefilter("ignore")
from iapws.humidAir import HumidAir

class Mixture(HumidAir):
    def _eq(self, T, P):
        return 0.5  # the air at saturation, which takes a second a state and is not asked for

out = []
for s in json.load(sys.stdin):
    a = Mixture(T=s["T"], P=s["p"] / 1e6, A=1 / (1 + s["W"]))
    out.append({"rho": a.rho, "cp": a.cp * 1e3})
print(json.dumps(out))
`

// TestAgainstRealAir compares with the real mixture of IAPWS G8-10 over the whole range. The stated
// uncertainties, as half-widths √3 times as large, must cover every deviation.
func TestAgainstRealAir(t *testing.T) {
	states := randomStates(t, 300)
	got := fluidtest.Deviations{}
	for k, r := range fluidtest.Python[struct{ Rho, Cp float64 }](t, "python3-iapws", humidAirScript, states) {
		s := states[k]
		f := mustMoist(t, s.W)
		a, err := f.At(s.T, s.P)
		if err != nil {
			t.Error(err)
			continue
		}
		cp, density := f.Uncertainty(s.T, s.P)
		got.Check(t, s, "cp", a.Cp/r.Cp-1, math.Sqrt(3)*cp)
		got.Check(t, s, "density", a.Density/r.Rho-1, math.Sqrt(3)*density)
	}
	t.Logf("worst relative deviations at %d states: %s", len(states), got)
}
