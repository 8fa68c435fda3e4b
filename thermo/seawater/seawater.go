// Package seawater holds seawater and brine made of it, liquid, from 0 °C to 120 °C, 0 to
// 120 g/kg and up to 12 MPa.
//
// Salinity is absolute: mass of salt per mass of seawater. cp and density at one atmosphere are
// the correlations of Sharqawy et al. (2010); both take their change with pressure from
// Nayar et al. (2016). cv follows from the two:
//
//	cv = cp − T β²/(ρ κ),   β = −(∂ρ/∂T)p/ρ,   κ = (∂ρ/∂p)T/ρ
//
// Enthalpy is the exact integral of cp, so that (∂h/∂T)p is cp at every pressure:
//
//	h(T, p) = ∫ cp(T, p) dT + (p − p0) (v − T ∂v/∂T),   p0 = 101 325 Pa
//
// with the integral from 20 °C and the parenthesis taken there, at p0. As ∂cp/∂p is
// −T ∂²v/∂T², the integral carries that parenthesis on to other temperatures. Zero
// is at 20 °C and one atmosphere for each salinity: only differences at one salinity mean
// anything.
//
// Largest deviations from TEOS-10 up to 42 g/kg and 40 °C: 0.30 % in cp, in fresh water at 0
// °C, 0.055 % in density, 1.6 % in the rise of h with pressure. Stronger brine up to 120 g/kg
// is off by 0.46 % in cp to 80 °C at one atmosphere. Under pressure, where TEOS-10 is itself
// extrapolated for such brine, it is 0.75 % at 120 g/kg, 40 °C and 12 MPa, 0.59 % at 10 MPa,
// and 0.44 % to 102 g/kg and 40 °C.
// Fresh water stays within 0.30 % and 0.021 % of IAPWS-IF97 to 120 °C; hot brine rests on the
// 0.28 % and 0.1 % that the authors state.
//
// Not modelled: freezing out of ice and boiling with what they leave behind, scale (calcium
// sulphate falls out of hot brine), dissolved air, and water whose salts are not those of the
// sea.
package seawater

import (
	"math"

	"heatreeve/thermo"
	"heatreeve/thermo/water"
)

const (
	zero        = 273.15 // K
	atmosphere  = thermo.Atmosphere
	base        = 20.0   // °C, where the enthalpy is 0 at one atmosphere
	maxT        = 393.15 // K
	maxP        = 12e6   // Pa
	maxSalinity = 0.12   // kg/kg
	validity    = "range of the correlations"
)

// seawater has its polynomials, all in t in °C, worked out for one salinity.
type seawater struct {
	name        string
	salinity    float64    // kg/kg
	cp, push    [4]float64 // cp at one atmosphere in J/(kg K), ∂cp/∂p in J/(kg K Pa)
	density     [5]float64 // kg/m³, at one atmosphere
	squeeze     [6]float64 // 1/Pa, κ without its change with pressure
	relief      [4]float64 // 1/Pa², ∂κ/∂p
	enthalpy    float64    // J/kg, ∫ cp from 0 °C to the base
	pushed      float64    // J/(kg Pa), ∫ push likewise, less the pressure term
	freezing    float64    // K
	bounds      thermo.Bounds
	boilsBelowP float64 // Pa, water's saturation pressure at the upper end
}

func (s *seawater) Name() string { return s.name }
func (s *seawater) Source() string {
	return "Sharqawy, Lienhard and Zubair, Desalination and Water Treatment 16 (2010); pressure: Nayar et al., Desalination 390 (2016)"
}
func (s *seawater) Phase() thermo.Phase   { return thermo.Liquid }
func (s *seawater) Bounds() thermo.Bounds { return s.bounds }

// MolarMass is 0: salinity is by mass.
func (s *seawater) MolarMass() float64 { return 0 }

// PressureLaw is that of thermodynamics within 1.2 % of v: ∂cp/∂p and the density come from
// different correlations.
func (s *seawater) PressureLaw() thermo.PressureLaw { return thermo.PressureLaw{Within: 0.012} }

// Span returns the freezing point at one atmosphere and the boiling point of water at p.
// Seawater freezes below the 0 °C where the correlations begin, 0.075 K lower
// per MPa; it boils later than water, by some half a kelvin at 35 g/kg.
func (s *seawater) Span(p float64) (lo, hi float64) {
	hi, err := water.SaturationTemperature(p)
	if err != nil {
		hi = math.Inf(1)
		if !(p > s.bounds.MinP) {
			hi = zero
		}
	}
	return s.freezing, hi
}

func (s *seawater) At(T, p float64) (thermo.Properties, error) {
	if err := s.check(T, p); err != nil {
		return thermo.Properties{}, err
	}
	t, above := T-zero, p-atmosphere
	rho, beta, kappa := s.expansion(t, p)
	cp, integral := s.heat(t, above)
	h := integral - s.enthalpy - above*s.pushed
	return thermo.Properties{
		Enthalpy:       h,
		InternalEnergy: h - p/rho,
		Cp:             cp,
		Cv:             cp - T*beta*beta/(rho*kappa),
		Density:        rho,
	}, nil
}

func (s *seawater) check(T, p float64) error {
	if err := s.bounds.Check(s.name, T, p, validity); err != nil {
		return err
	}
	if p >= s.boilsBelowP {
		return nil
	}
	if saturation, err := water.SaturationPressure(T); err == nil && saturation <= p {
		return nil
	}
	_, boiling := s.Span(p)
	if T <= boiling {
		return nil
	}
	return &thermo.RangeError{
		Fluid: s.name, Quantity: "temperature", Value: T, Bound: boiling,
		Why: "boiling point of water at this pressure; seawater boils a little later",
	}
}

// heat returns cp at the excess pressure above one atmosphere and its integral from 0 °C.
func (s *seawater) heat(t, above float64) (cp, integral float64) {
	a := s.cp[0] + above*s.push[0]
	b := s.cp[1] + above*s.push[1]
	c := s.cp[2] + above*s.push[2]
	d := s.cp[3] + above*s.push[3]
	return a + t*(b+t*(c+t*d)), t * (a + t*(b/2+t*(c/3+t*(d/4))))
}

// expansion returns density in kg/m³, the expansion coefficient β in 1/K and the compressibility κ
// in 1/Pa: ρ = ρ0 exp(squeeze·(p − p0) + relief·(p² − p0²)/2).
func (s *seawater) expansion(t, p float64) (rho, beta, kappa float64) {
	r, k, m := &s.density, &s.squeeze, &s.relief
	rho0 := r[0] + t*(r[1]+t*(r[2]+t*(r[3]+t*r[4])))
	slope := r[1] + t*(2*r[2]+t*(3*r[3]+t*4*r[4]))
	squeeze := k[0] + t*(k[1]+t*(k[2]+t*(k[3]+t*(k[4]+t*k[5]))))
	easing := k[1] + t*(2*k[2]+t*(3*k[3]+t*(4*k[4]+t*5*k[5])))
	relief := m[0] + t*(m[1]+t*(m[2]+t*m[3]))
	change := m[1] + t*(2*m[2]+t*3*m[3])
	above, squares := p-atmosphere, (p*p-atmosphere*atmosphere)/2
	rho = rho0 * math.Exp(squeeze*above+relief*squares)
	beta = -slope/rho0 - easing*above - change*squares
	return rho, beta, squeeze + relief*p
}
