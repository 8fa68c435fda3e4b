package fluidtest

import (
	"math"
	"testing"

	"heatreeve/thermo"
)

// damp is a made-up gas with cp = 1000 and R = 300 J/(kg K) that condenses below 300 K.
type damp struct {
	sound
	spoil func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error)
}

func (damp) Name() string                  { return "damp" }
func (damp) Phase() thermo.Phase           { return thermo.Gas }
func (damp) Span(float64) (lo, hi float64) { return 300, math.Inf(1) }

func (f damp) At(T, p float64) (thermo.Properties, error) {
	if err := f.Bounds().Check("damp", T, p, "range"); err == nil && T < 300 {
		return thermo.Properties{}, &thermo.RangeError{Fluid: "damp", Quantity: "temperature", Value: T, Bound: 300, Below: true, Why: "dew point"}
	}
	return damp{}.Sensible(T, p)
}

func (f damp) Sensible(T, p float64) (thermo.Properties, error) {
	var s thermo.Properties
	err := f.Bounds().Check("damp", T, p, "range")
	if err == nil {
		h := 1000 * (T - 290)
		s = thermo.Properties{Enthalpy: h, InternalEnergy: h - 300*T, Cp: 1000, Cv: 700, Density: p / (300 * T)}
	}
	if f.spoil != nil {
		return f.spoil(T, p, s, err)
	}
	return s, err
}

func TestFaultsOfWetFluidsAreCaught(t *testing.T) {
	Run(t, damp{})
	below := func(change func(T float64, s *thermo.Properties)) func(float64, float64, thermo.Properties, error) (thermo.Properties, error) {
		return edit(func(T float64, s *thermo.Properties) {
			if T < 300 {
				change(T, s)
			}
		})
	}
	for _, tt := range []struct {
		fault string
		spoil func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error)
	}{
		{"another enthalpy within the phase", edit(func(T float64, s *thermo.Properties) { s.Enthalpy++; s.InternalEnergy++ })},
		{"NaN below the dew point", below(func(T float64, s *thermo.Properties) { s.Density = math.NaN() })},
		{"a step at the dew point", below(func(T float64, s *thermo.Properties) { s.Enthalpy--; s.InternalEnergy-- })},
		{"another cp below", below(func(T float64, s *thermo.Properties) { s.Cp = 1001 })},
		{"another density below", below(func(T float64, s *thermo.Properties) {
			s.Density *= 1 + 1e-5
			s.InternalEnergy = s.Enthalpy - 300*T/(1+1e-5)
		})},
		{"refused below", func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) { return damp{}.At(T, p) }},
		{"no bounds", func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
			return damp{}.Sensible(max(T, 270), p)
		}},
		{"figures beside an error", func(T, p float64, s thermo.Properties, err error) (thermo.Properties, error) {
			s.Cp = 1000
			return s, err
		}},
	} {
		f := damp{spoil: tt.spoil}
		var n tally
		suite{f: f, states: states(f)}.sensible(&n)
		if n == 0 {
			t.Errorf("%s: not noticed", tt.fault)
		}
	}
}
