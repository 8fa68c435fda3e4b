package aqueous

import (
	"cmp"
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
	"heatreeve/thermo/water"
)

func mustNew(t testing.TB, solute string, x, u float64) thermo.Fluid {
	t.Helper()
	return fluidtest.Must(New(solute, x, u))(t)
}

func TestConformance(t *testing.T) {
	for k := range solutes {
		s := &solutes[k]
		for _, share := range []float64{0, 0.17, 0.5, 0.83, 1} {
			f := mustNew(t, s.name, share*s.max, min(0.005, s.room(share*s.max)))
			t.Run(f.Name(), func(t *testing.T) { fluidtest.Run(t, f) })
		}
		vague := mustNew(t, s.name, s.max/2, min(0.1, s.room(s.max/2)))
		t.Run(vague.Name()+" or so", func(t *testing.T) { fluidtest.Run(t, vague) })
		if s.density20 > 0 {
			f, err := NewByVolume(s.name, 0.3, 0)
			if err != nil {
				t.Fatal(err)
			}
			t.Run(f.Name(), func(t *testing.T) { fluidtest.Run(t, f) })
		}
	}
}

// room is how uncertain a strength may be without passing an eutectic.
func (s *solute) room(x float64) float64 {
	if s.eutectic {
		return (s.max - x) / 2
	}
	return maxFractionUncertainty
}

// pressure at which none of the mixtures boils.
const pressure = 3e5

// The pressure term against water: dilute glycol at 20 °C and 60 °C must change
// its enthalpy with pressure as IAPWS-IF97 water does, within the spread that a
// term of one value for all temperatures leaves.
func TestPressureTerm(t *testing.T) {
	w, g := water.Liquid(), mustNew(t, "propylene glycol", 0.01, 0)
	rise := func(f thermo.Fluid, T float64) float64 {
		a, err1 := f.At(T, 1e5)
		b, err2 := f.At(T, 1.1e6)
		if err := errors.Join(err1, err2); err != nil {
			t.Fatal(err)
		}
		return b.Enthalpy - a.Enthalpy
	}
	for _, T := range []float64{293.15, 313.15, 333.15} {
		if got, want := rise(g, T), rise(w, T); !(math.Abs(got-want) <= 0.1*want) {
			t.Errorf("%g K: %.0f J/kg per MPa, water %.0f", T, got, want)
		}
	}
}

func TestNewRefuses(t *testing.T) {
	for _, tt := range []struct {
		solute string
		x, u   float64
		want   string
	}{
		{"propylen glycol", 0.3, 0, `unknown solute "propylen glycol", did you mean "propylene glycol"; known: ethylene glycol, propylene glycol, ethanol, methanol, glycerol, calcium chloride, magnesium chloride, sodium chloride, potassium carbonate, potassium acetate, potassium formate, lithium chloride, ammonia`},
		{"glycol", 0.3, 0, `unknown solute "glycol", did you mean "ethylene glycol" or "propylene glycol"; known`},
		{"Calcium", 0.3, 0, `unknown solute "Calcium", did you mean "calcium chloride"; known`},
		{"", 0.3, 0, `unknown solute ""; known`},
		{"CaCl", 0.2, 0, `unknown solute "CaCl", did you mean "calcium chloride"; known: ethylene glycol`},
		{"brine", 0.3, 0, `unknown solute "brine"; known`},
		{"ethylene glycol", 0.61, 0, "mass fraction 0.61"},
		{"sodium chloride", 0.26, 0, "sodium chloride of mass fraction 0.26; the polynomials hold from 0 to the eutectic, 0.23"},
		{"MgCl2", 0.21, 0, "magnesium chloride of mass fraction 0.21; the polynomials hold from 0 to the eutectic, 0.205"},
		{"CaCl2", 0.3, 0, "calcium chloride of mass fraction 0.3; the polynomials hold from 0 to the eutectic, 0.297"},
		{"potassium formate", 0.5, 0, "from 0 to 0.48"},
		{"ethylene glycol", -0.01, 0, "mass fraction -0.01"},
		{"ethylene glycol", 32, 0, "mass fraction 32"},
		{"ethylene glycol", math.NaN(), 0, "mass fraction NaN"},
		{"CaCl2", 0.295, 0.0011, "calcium chloride of mass fraction 0.295 may have up to 0.2972 by twice its uncertainty; the polynomials hold from 0 to the eutectic, 0.297, and beyond it salt falls out"},
		{"ethylene glycol", 0.3, -0.01, "uncertainty of the mass fraction is -0.01"},
		{"ethylene glycol", 0.3, math.Inf(1), "uncertainty of the mass fraction is +Inf"},
	} {
		if f, err := New(tt.solute, tt.x, tt.u); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("New(%q, %g, %g) = %v, %v; want an error with %q", tt.solute, tt.x, tt.u, f, err, tt.want)
		}
	}
}

func TestNames(t *testing.T) {
	for given, want := range map[string]string{
		"Propylene-Glycol": "propylene glycol 20 %", "ETHYLENEGLYCOL": "ethylene glycol 20 %", "mpg": "propylene glycol 20 %",
		"CaCl2": "calcium chloride 20 %", "nacl": "sodium chloride 20 %", "MgCl2": "magnesium chloride 20 %",
		"K2CO3": "potassium carbonate 20 %", "LiCl": "lithium chloride 20 %", "nh3": "ammonia 20 %",
		"HCOOK": "potassium formate 20 %", "CH3COOK": "potassium acetate 20 %", "potassium_formate": "potassium formate 20 %",
		"C2H5OH": "ethanol 20 %", "ch3oh": "methanol 20 %", "glycerine": "glycerol 20 %",
	} {
		if got := mustNew(t, given, 0.2, 0).Name(); got != want {
			t.Errorf("%q is %q, want %q", given, got, want)
		}
	}
	for _, s := range solutes {
		for _, n := range append([]string{s.name}, s.aliases...) {
			if got, err := lookup(strings.ToUpper(n)); err != nil || got.name != s.name {
				t.Errorf("%q is %v, %v; want %s", n, got, err, s.name)
			}
		}
	}
	if len(Solutes()) != 13 {
		t.Errorf("%d solutes, want 13", len(Solutes()))
	}
}

func TestLimits(t *testing.T) {
	for _, name := range Solutes() {
		l, err := LimitsOf(name)
		if err != nil {
			t.Fatal(err)
		}
		f := mustNew(t, l.Aliases[0], l.MassFraction, 0)
		want := map[string]float64{"ethylene glycol": 373.15, "propylene glycol": 373.15, "ammonia": 303.15}[name]
		if b := f.Bounds(); b.MaxT != l.MaxT || b.MaxT != cmp.Or(want, 313.15) || b.MaxP != 2.5e6 {
			t.Errorf("%s: up to %g K and %g Pa, want %g, %g, 2.5e6", f.Name(), b.MaxT, b.MaxP, l.MaxT, cmp.Or(want, 313.15))
		}
		if _, err := New(name, l.MassFraction+1e-6, 0); err == nil || strings.Contains(err.Error(), "eutectic") != l.Eutectic {
			t.Errorf("%s beyond its limit: %v", name, err)
		}
		if _, err := NewByVolume(name, l.VolumeFraction, 0); (err == nil) != (l.VolumeFraction > 0) {
			t.Errorf("%s of %g vol %%: %v", name, 100*l.VolumeFraction, err)
		}
	}
	if _, err := LimitsOf("brine"); err == nil {
		t.Error("brine has limits")
	}
}

func TestRefusalNamesTheBound(t *testing.T) {
	f := mustNew(t, "propylene glycol", 0.32, 0)
	for _, tt := range []struct {
		T, p float64
		why  string
	}{
		{250, pressure, "freezing point"},
		{380, pressure, "range of the polynomials"},
		{350, 20e3, "boiling point of water at this pressure; the mixture boils a little later"},
		{300, 3e6, "range of the polynomials"},
	} {
		_, err := f.At(tt.T, tt.p)
		e := new(thermo.RangeError)
		if !errors.As(err, &e) || e.Why != tt.why {
			t.Errorf("%g K, %g Pa: %v, want %q", tt.T, tt.p, err, tt.why)
		}
	}
}

func TestFreezingRefusalNamesItsSource(t *testing.T) {
	for u, why := range map[float64]string{0: "freezing point by ASHRAE", 0.01: "freezing point by ASHRAE, were the mixture weaker by twice the uncertainty of its strength"} {
		_, err := mustNew(t, "ethylene glycol", 0.5, u).At(238, pressure)
		e := new(thermo.RangeError)
		if !errors.As(err, &e) || e.Why != why {
			t.Errorf("known to %g: %v, want %q", u, err, why)
		}
	}
}
