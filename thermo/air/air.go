// Package air holds moist air by the psychrometric relations of ASHRAE: a mixture of ideal dry
// air and ideal vapour, ASHRAE Handbook Fundamentals 2017, chapter 1.
//
// Humidity is the ratio W of the masses of vapour and dry air. Handbooks state
// enthalpy and volume per kilogram of DRY air; a meter measures all that flows, so
// a [thermo.Fluid] states them per kilogram of MOIST air, the former divided by
// 1 + W:
//
//	h  = (1006 t + W (2 501 000 + 1860 t)) / (1 + W)     J/kg, t in °C
//	cp = (1006 + 1860 W) / (1 + W)                       J/(kg K)
//	ρ  = (1 + W) p / (287.042 T (1 + 1.607858 W))         kg/m³
//	cv = cp − R,  u = h − p/ρ
//
// The sensible duty of air is at constant W, so the latent part of h falls out of a
// difference. Air is refused below its dew or frost point; Sensible goes on below it with the
// same W, as if nothing condensed.
//
// The range is -50 °C to 200 °C, 20 kPa to 300 kPa and W up to 0.25. Against the real mixture of
// IAPWS G8-10 density is off by up to 0.16 % and cp by 0.22 % at atmospheric pressure to 30 °C,
// 0.48 % to 40 °C and 1.7 % at 60 °C saturated; a constant cp of dry air is 0.5 % low at 100 °C
// and 1.9 % low at 200 °C. With much vapour it is worse, at atmospheric pressure and W 0.25 cp
// 2.8 % low at 200 °C and density 0.22 % at 70 °C. The worst corners of the range: saturated at
// 95.5 °C, 300 kPa and W 0.25 cp is 3.84 % low; dry at -50 °C and 300 kPa density is 0.46 % low.
// The uncertainty follows these deviations by state. The relations agree with psychrolib to its
// last digits.
//
// Relative humidity below 0 °C is taken over ice, as the saturation equations are. Most sensors,
// and weather services by the WMO's convention, state it over supercooled water there: see
// [HumidityRatio].
//
// Not modelled: fog and rain carried along, the latent heat of what condenses, dissolved air and
// the enhancement of the vapour's pressure by the air about it (0.5 % of W at
// atmospheric pressure), other vapours than water, other gases than air.
package air

import (
	"math"

	"heatreeve/thermo"
)

const (
	zero        = 273.15   // K
	gasConstant = 287.042  // J/(kg K), of dry air
	lightness   = 1.607858 // of vapour: molar mass of dry air over that of water
	dryCp       = 1006.0   // J/(kg K)
	vapourCp    = 1860.0   // J/(kg K)
	latent      = 2501e3   // J/kg, of vapour at 0 °C over liquid water at 0 °C
	maxRatio    = 0.25     // kg/kg
	rounding    = 1e-10    // relative, of pressures
	liveName    = "moist air"
	validity    = "range that the psychrometric relations are held to"
)

var bounds = thermo.Bounds{MinT: 223.15, MaxT: 473.15, MinP: 20e3, MaxP: 300e3}

// moist is air of one humidity ratio; what depends on it alone is worked out once.
type moist struct {
	name      string
	w         float64
	h0        float64 // J/kg, at 0 °C
	cp        float64 // J/(kg K)
	r         float64 // J/(kg K), gas constant of the mixture
	share     float64 // mole fraction of vapour
	lastDew   float64 // K, dew point at the highest pressure allowed
	massCpWet float64 // W/(cp (1 + W)), what the vapour's cp weighs
}

func makeMoist(name string, w float64) *moist {
	m := &moist{
		name: name, w: w,
		h0:    w * latent / (1 + w),
		cp:    (dryCp + vapourCp*w) / (1 + w),
		r:     gasConstant * (1 + lightness*w) / (1 + w),
		share: w / (massRatio + w),
	}
	m.massCpWet = w / (m.cp * (1 + w))
	m.lastDew, _ = m.Span(bounds.MaxP)
	return m
}

func (m *moist) Name() string { return m.name }
func (m *moist) Source() string {
	return "ASHRAE Handbook Fundamentals 2017, chapter 1 (psychrometrics; Hyland and Wexler 1983)"
}
func (m *moist) Phase() thermo.Phase   { return thermo.Gas }
func (m *moist) Bounds() thermo.Bounds { return bounds }
func (m *moist) MolarMass() float64    { return thermo.R / m.r }

// Span returns the dew or frost point at p, 0 where that is below -100 °C, and +Inf.
func (m *moist) Span(p float64) (lo, hi float64) {
	if p > 0 {
		lo = saturationTemperature(m.share * p)
	}
	return lo, math.Inf(1)
}

func (m *moist) At(T, p float64) (thermo.Properties, error) {
	s, err := m.Sensible(T, p)
	if err != nil || T >= m.lastDew || m.share*p <= saturationPressure(T)*(1+rounding) {
		return s, err
	}
	dew, _ := m.Span(p)
	return thermo.Properties{}, &thermo.RangeError{
		Fluid: m.name, Quantity: "temperature", Value: T, Bound: dew, Below: true, Why: "dew or frost point",
	}
}

// Sensible is At, but not refused below the dew point.
func (m *moist) Sensible(T, p float64) (thermo.Properties, error) {
	if err := bounds.Check(m.name, T, p, validity); err != nil {
		return thermo.Properties{}, err
	}
	h, rt := m.h0+m.cp*(T-zero), m.r*T
	return thermo.Properties{
		Enthalpy:       h,
		InternalEnergy: h - rt,
		Cp:             m.cp,
		Cv:             m.cp - m.r,
		Density:        p / rt,
	}, nil
}
