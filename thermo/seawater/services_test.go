//go:build services

package seawater

import (
	"math"
	"math/rand/v2"
	"testing"

	"heatreeve/thermo/fluidtest"
)

// state of seawater as the outside programs read it.
type state struct {
	T float64 `json:"T"` // K
	P float64 `json:"p"` // Pa
	S float64 `json:"S"` // kg/kg
}

// figures of one state; what a program does not say stays 0.
type figures struct{ Cp, H, Rho, Cv, Squeezed, Freezing float64 }

func randomStates(seed uint64, n int, maxT, maxP, maxS float64) []state {
	r := rand.New(rand.NewPCG(seed, 7))
	out := make([]state, n)
	for k := range out {
		out[k] = state{T: zero + (maxT-zero)*r.Float64(), P: atmosphere + (maxP-atmosphere)*r.Float64(), S: maxS * r.Float64()}
	}
	return out
}

const gswScript = `
import json, sys
import gsw
out = []
for s in json.load(sys.stdin):
    SA, t, p = 1e3 * s["S"], s["T"] - 273.15, (s["p"] - 101325) / 1e4
    cp, rho = gsw.cp_t_exact(SA, t, p), gsw.rho_t_exact(SA, t, p)
    beta = gsw.alpha_wrt_t_exact(SA, t, p)
    kappa = (gsw.rho_t_exact(SA, t, p + 10) - gsw.rho_t_exact(SA, t, p)) / (1e5 * rho)
    out.append({"cp": cp, "rho": rho, "cv": cp - s["T"] * beta**2 / (rho * kappa),
                "squeezed": rho / gsw.rho_t_exact(SA, t, 0),
                "h": gsw.enthalpy_t_exact(SA, t, p) - gsw.enthalpy_t_exact(SA, 20, 0),
                "freezing": gsw.t_freezing(SA, 0, 0) + 273.15})
print(json.dumps(out))
`

// TestAgainstTEOS10AtRandom covers what TEOS-10 knows best: to 42 g/kg, 40 °C and here 12 MPa.
// Enthalpies count from 20 °C and one atmosphere at the same salinity; what is over of a bound
// of 0.30 % comes from near there, where the pressure term is the whole of it.
func TestAgainstTEOS10AtRandom(t *testing.T) {
	states := randomStates(1, 3000, 313.15, maxP, 0.042)
	got := fluidtest.Deviations{}
	for k, r := range fluidtest.Python[figures](t, "python3-gsw", gswScript, states) {
		s := states[k]
		f := mustNew(t, s.S)
		a := mustAt(t, f, s.T, s.P)
		cp, density := f.Uncertainty(s.T, s.P)
		got.Check(t, s, "cp", a.Cp/r.Cp-1, math.Sqrt(3)*cp)
		got.Check(t, s, "density", a.Density/r.Rho-1, math.Sqrt(3)*density)
		got.Check(t, s, "rise of density by pressure", a.Density/mustAt(t, f, s.T, atmosphere).Density/r.Squeezed-1, 7.5e-5)
		got.Check(t, s, "cv", a.Cv/r.Cv-1, 5e-3)
		got.Check(t, s, "h in J/kg, beyond 0.30 % of the warming", max(math.Abs(a.Enthalpy-r.H)-3e-3*a.Cp*math.Abs(s.T-zero-base), 0), 0.016*(s.P-atmosphere)/1e3)
		lo, _ := f.Span(s.P)
		got.Check(t, s, "freezing point in K", lo-r.Freezing, 0.01)
	}
	t.Logf("worst deviations at %d states, relative where no unit stands: %s", len(states), got)
}

// gridStates spread evenly, the corners among them.
func gridStates(n int, maxT, maxP, maxS float64) []state {
	var out []state
	for i := range n + 1 {
		for j := range n + 1 {
			for k := range n + 1 {
				x, y, z := float64(i)/float64(n), float64(j)/float64(n), float64(k)/float64(n)
				out = append(out, state{T: zero + (maxT-zero)*x, P: atmosphere + (maxP-atmosphere)*y, S: maxS * z})
			}
		}
	}
	return out
}

// TestBrineAgainstTEOS10 goes on to 120 g/kg, beyond what TEOS-10 is made for under pressure,
// over a grid with the corners, where cp is worst, and at random: the bounds are the half-width
// of cp that is stated and the 0.1 % of the density correlation's authors.
func TestBrineAgainstTEOS10(t *testing.T) {
	states := append(gridStates(10, 313.15, maxP, maxSalinity), randomStates(2, 2000, 313.15, maxP, maxSalinity)...)
	got := fluidtest.Deviations{}
	for k, r := range fluidtest.Python[figures](t, "python3-gsw", gswScript, states) {
		s := states[k]
		f := mustNew(t, s.S)
		a := mustAt(t, f, s.T, s.P)
		u, _ := f.Uncertainty(s.T, s.P)
		got.Check(t, s, "cp", a.Cp/r.Cp-1, math.Sqrt(3)*u)
		got.Check(t, s, "density", a.Density/r.Rho-1, 1e-3)
		lo, _ := f.Span(s.P)
		got.Check(t, s, "freezing point in K", lo-r.Freezing, 0.05)
	}
	if !(math.Abs(got["cp"]-7.45e-3) <= 5e-5) {
		t.Errorf("cp is off by %.4g at worst, want the 0.75 %% that the package comment tells", got["cp"])
	}
	t.Logf("worst deviations at %d states, relative where no unit stands: %s", len(states), got)
}

const iapwsScript = `
import json, sys, warnings
warnings.simplefilter("ignore")
from iapws import SeaWater
out = []
for s in json.load(sys.stdin):
    a = SeaWater(T=s["T"], P=s["p"] / 1e6, S=s["S"])
    out.append({"cp": a.cp * 1e3, "rho": a.rho})
print(json.dumps(out))
`

// TestHotBrineAgainstIAPWS holds cp to IAPWS R13-08, to 80 °C and 120 g/kg at one atmosphere,
// where that release gives it; its density of brine hotter than 40 °C or saltier than 42 g/kg
// is an extrapolation and is not compared.
func TestHotBrineAgainstIAPWS(t *testing.T) {
	states := randomStates(3, 300, 353.15, atmosphere, maxSalinity)
	got := fluidtest.Deviations{}
	for k, r := range fluidtest.Python[figures](t, "python3-iapws", iapwsScript, states) {
		s := states[k]
		f := mustNew(t, s.S)
		a := mustAt(t, f, s.T, s.P)
		cp, density := f.Uncertainty(s.T, s.P)
		got.Check(t, s, "cp", a.Cp/r.Cp-1, math.Sqrt(3)*cp)
		if s.T < 313.15 && s.S < 0.042 {
			got.Check(t, s, "density", a.Density/r.Rho-1, math.Sqrt(3)*density)
		}
	}
	t.Logf("worst relative deviations at %d states: %s", len(states), got)
}
