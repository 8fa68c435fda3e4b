package fluidtest

import (
	"testing"

	"heatreeve/thermo"
)

// oily is a made-up liquid that expands, with the pressure law of law and, where it is
// incompressible, the term of 320 K.
type oily struct {
	sound
	law   thermo.PressureLaw
	stiff thermo.Incompressible
	spoil func(p float64, s thermo.Properties) thermo.Properties
}

func (oily) expanding(T float64) (rho, slope float64) { return 1000 - 0.5*(T-300), -0.5 }

func (f oily) PressureLaw() thermo.PressureLaw { return f.law }

func (f oily) At(T, p float64) (thermo.Properties, error) {
	s, err := f.right(T, p)
	if err == nil {
		rho, _ := f.expanding(T)
		s = f.stiff.Properties(p, 4000*(T-300), 4000, rho)
		s = f.spoil(p, s)
	}
	return s, err
}

// push adds to the enthalpy so many m³/kg times the pressure.
func push(term float64) func(p float64, s thermo.Properties) thermo.Properties {
	return func(p float64, s thermo.Properties) thermo.Properties {
		s.Enthalpy, s.InternalEnergy = s.Enthalpy+term*p, s.InternalEnergy+term*p
		return s
	}
}

func TestFaultsOfPressureAreCaught(t *testing.T) {
	stiff := thermo.NewIncompressible(320, 280, 360, oily{}.expanding)
	fixed, term := stiff.PressureLaw(), (1-320*0.5/990)/990
	Run(t, oily{law: fixed, stiff: stiff, spoil: push(0)})
	for _, tt := range []struct {
		fault string
		law   thermo.PressureLaw
		spoil func(p float64, s thermo.Properties) thermo.Properties
		fails bool
	}{
		{"none", fixed, push(0), false},
		{"the wrong sign", fixed, push(-2 * term), true},
		{"no pressure term", fixed, push(-term), true},
		{"v alone", fixed, push(1./990 - term), true},
		{"a term off by 3e-5 of v", fixed, push(3e-5 / 990), true},
		{"the term of another temperature", thermo.PressureLaw{Fixed: 325}, push(0), true},
		{"a fixed term where every state should have its own", thermo.PressureLaw{}, push(0), true},
		{"a fixed term within 10 % of v", thermo.PressureLaw{Within: 0.1}, push(0), false},
		{"the wrong sign within 10 % of v", thermo.PressureLaw{Within: 0.1}, push(-2 * term), true},
		{"compression", fixed, func(p float64, s thermo.Properties) thermo.Properties { s.Density *= 1 + 1e-9*p; return s }, true},
		{"an ideal gas's", thermo.PressureLaw{Ideal: true}, push(-term), false},
		{"a pressure term beside an ideal gas's", thermo.PressureLaw{Ideal: true}, push(0), true},
	} {
		f := oily{law: tt.law, stiff: stiff, spoil: tt.spoil}
		var n tally
		suite{f: f}.pressure(&n)
		if (n > 0) != tt.fails {
			t.Errorf("%s: %d complaints, want some: %v", tt.fault, n, tt.fails)
		}
	}
}

// A fluid that states no law is held to that of thermodynamics all the same.
func TestFaultsOfUnstatedPressureAreCaught(t *testing.T) {
	for fault, term := range map[string]float64{"the wrong sign": -2e-3, "none": -1e-3, "4 % too much": 4e-5} {
		f := sound{func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
			return push(term)(p, s), err
		}}
		var n tally
		suite{f: f}.pressure(&n)
		if n == 0 {
			t.Errorf("%s: not noticed", fault)
		}
	}
}
