//go:build services

package helmholtz

import (
	"bytes"
	"math"
	"math/rand/v2"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

// state is ours; the density goes to the other side and the pressure comes back,
// so that neither side's search for a density is in the way.
type state struct {
	T, P, Rho, H, Cp, Cv float64
}

// draw picks states of f, spread by the logarithm of the pressure up to a limit.
func draw(t *testing.T, f thermo.Fluid, n int, maxP float64) []state {
	t.Helper()
	random := rand.New(rand.NewPCG(13, 13))
	var out []state
	for len(out) < n {
		b := f.Bounds()
		lo, hi := math.Log(max(b.MinP, 1e3)), math.Log(min(b.MaxP, maxP))
		p := math.Exp(lo + (hi-lo)*random.Float64())
		T1, T2 := f.Span(p)
		T1, T2 = max(T1, b.MinT), min(T2, b.MaxT)
		if !(T1 < T2) {
			continue
		}
		T := T1 + (T2-T1)*math.Pow(random.Float64(), 2)
		s, err := f.At(T, p)
		if err != nil {
			t.Fatalf("%s: %v", f.Name(), err)
		}
		out = append(out, state{T, p, s.Density, s.Enthalpy, s.Cp, s.Cv})
	}
	return out
}

// compare returns the largest deviations of two lists; enthalpies are compared as
// differences to the first state, over the span of all of them.
func compare(got, want []state) (worst state) {
	var span float64
	for i := range got {
		span = max(span, math.Abs(got[i].H-got[0].H))
	}
	for i := range got {
		g, w := got[i], want[i]
		worst.P = max(worst.P, math.Abs(g.P/w.P-1))
		worst.Cp = max(worst.Cp, math.Abs(g.Cp/w.Cp-1))
		worst.Cv = max(worst.Cv, math.Abs(g.Cv/w.Cv-1))
		worst.H = max(worst.H, math.Abs((g.H-got[0].H)-(w.H-want[0].H))/span)
	}
	return worst
}

const airScript = `
import json, sys, warnings
warnings.simplefilter("ignore")
from iapws.humidAir import Air
out = []
for s in json.load(sys.stdin):
    a = Air(T=s["T"], rho=s["Rho"])
    out.append({"T": s["T"], "P": a.P * 1e6, "Rho": a.rho, "H": a.h * 1e3, "Cp": a.cp * 1e3, "Cv": a.cv * 1e3})
print(json.dumps(out))
`

// TestAirAgainstIAPWS compares with the class of python3-iapws for dry air, which
// has its own copy of the coefficients.
func TestAirAgainstIAPWS(t *testing.T) {
	got := draw(t, Air(), 300, 100e6)
	worst := compare(got, fluidtest.Python[state](t, "python3-iapws", airScript, got))
	t.Logf("300 states, largest deviations: pressure %.1e, cp %.1e, cv %.1e, enthalpy %.1e of its span", worst.P, worst.Cp, worst.Cv, worst.H)
	if !(worst.P < 1e-11 && worst.Cp < 1e-9 && worst.Cv < 1e-9 && worst.H < 1e-11) {
		t.Error("more than rounding, and what the search for a density leaves in cp and cv")
	}
}

const termsScript = `
import json, math, sys
from iapws.iapws95 import MEoS
out = []
for f in json.load(sys.stdin):
    e = MEoS.__new__(MEoS)
    e._constants, e.Fi0 = f["Constants"], f["Ideal"]
    r, states = f["R"], []
    for s in f["States"]:
        tau, d = f["ReducingT"] / s["T"], s["Rho"] / f["Dense"]
        x, i = e._phir(tau, d), e._phi0(tau, d)
        z = 1 + d * x["fird"]
        cv = -tau**2 * (i["fiott"] + x["firtt"])
        cp = cv + (z - d * tau * x["firdt"])**2 / (1 + 2 * d * x["fird"] + d**2 * x["firdd"])
        h = tau * (i["fiot"] + x["firt"]) + z
        states.append({"T": s["T"], "P": z * s["Rho"] * r * s["T"], "H": h * r * s["T"], "Cp": cp * r, "Cv": cv * r})
    out.append(states)
print(json.dumps(out))
`

// published is a substance in the words of python3-iapws.
type published struct {
	Constants, Ideal    map[string][]float64
	R, ReducingT, Dense float64
	States              []state
}

func publish(f *fluid, states []state) published {
	p := published{map[string][]float64{}, map[string][]float64{}, f.r, f.reducingT, f.dense, states}
	put := func(to map[string][]float64, keys string, values ...float64) {
		for i, key := range bytes.Fields([]byte(keys)) {
			to[string(key)] = append(to[string(key)], values[i])
		}
	}
	for _, x := range f.powers {
		if x.l == 0 {
			put(p.Constants, "nr1 d1 t1", x.n, float64(x.d), x.t)
		} else {
			put(p.Constants, "nr2 d2 t2 c2 gamma2", x.n, float64(x.d), x.t, float64(x.l), 1)
		}
	}
	for _, x := range f.gaussians {
		put(p.Constants, "nr3 d3 t3 alfa3 epsilon3 beta3 gamma3", x.n, float64(x.d), x.t, x.eta, x.epsilon, x.beta, x.gamma)
	}
	for _, x := range f.nonAnalytics {
		put(p.Constants, "nr4 a4 b4 A B C D beta4", x.n, x.a, x.b, x.A, x.B, x.C, x.D, x.beta)
	}
	p.Ideal["ao_log"] = []float64{1, f.ideal.logTau}
	for _, key := range []string{"ao_pow", "pow", "ao_exp", "titao"} {
		p.Ideal[key] = []float64{}
	}
	for _, x := range f.ideal.powers {
		put(p.Ideal, "ao_pow pow", x.n, x.t)
	}
	for _, x := range f.ideal.oscillators {
		put(p.Ideal, "ao_exp titao", x.n, x.theta)
	}
	return p
}

// TestTermsAgainstIAPWS has python3-iapws evaluate our tables with its own forms
// of the terms, gas and liquid: a check of the evaluation, not of the
// coefficients. It does not know two of the terms of ammonia.
func TestTermsAgainstIAPWS(t *testing.T) {
	var in []published
	var fluids []*fluid
	for _, f := range all(t) {
		g := f.(*fluid)
		if g.substance == &ammonia || g.substance == &dryAir {
			continue
		}
		fluids = append(fluids, g)
		in = append(in, publish(g, draw(t, f, 300, 100e6)))
	}
	out := fluidtest.Python[[]state](t, "python3-iapws", termsScript, in)
	for i, f := range fluids {
		worst := compare(in[i].States, out[i])
		t.Logf("%-22s largest deviations: pressure %.1e, cp %.1e, cv %.1e, enthalpy %.1e of its span", f.name, worst.P, worst.Cp, worst.Cv, worst.H)
		if !(worst.P < 1e-9 && worst.Cp < 1e-9 && worst.Cv < 1e-9 && worst.H < 1e-11) {
			t.Errorf("%s: more than rounding", f.name)
		}
	}
}

const ammoniaScript = `
import json, sys, warnings
warnings.simplefilter("ignore")
from iapws.ammonia import H2ONH3
e, out = H2ONH3(), []
for s in json.load(sys.stdin):
    a = e._prop(s["Rho"], s["T"], 1.0)
    out.append({"T": s["T"], "P": a["P"] * 1e6, "H": a["h"] * 1e3, "Cp": a["cp"] * 1e3, "Cv": a["cv"] * 1e3})
print(json.dumps(out))
`

// TestAmmoniaAgainstOlderEquation compares the gas with the equation of
// Tillner-Roth and others (1993) as IAPWS G4-01 contains it: another fit to other
// data. The tolerances are the deviations found, rounded up; they are largest at
// the dew point.
func TestAmmoniaAgainstOlderEquation(t *testing.T) {
	f, _ := New("NH3")
	got := draw(t, within{f, thermo.Bounds{MinT: 239, MaxT: 600, MinP: 1e3, MaxP: 8e6}}, 300, 8e6)
	worst := compare(got, fluidtest.Python[state](t, "python3-iapws", ammoniaScript, got))
	t.Logf("300 states to 8 MPa, largest deviations: pressure %.1e, cp %.1e, cv %.1e, enthalpy %.1e of its span", worst.P, worst.Cp, worst.Cv, worst.H)
	if !(worst.P < 1e-3 && worst.Cp < 0.022 && worst.Cv < 0.027 && worst.H < 5e-3) {
		t.Error("further apart than expected")
	}
}

// within is a fluid in a smaller box.
type within struct {
	thermo.Fluid
	box thermo.Bounds
}

func (w within) Bounds() thermo.Bounds { return w.box }

func (w within) At(T, p float64) (thermo.Properties, error) {
	if err := w.box.Check(w.Name(), T, p, "the box of this test"); err != nil {
		return thermo.Properties{}, err
	}
	return w.Fluid.At(T, p)
}
