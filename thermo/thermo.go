// Package thermo holds the fluids and the heat equations: pure functions in
// SI units, without clock, file, logger or goroutine.
//
// A fluid family has a package of its own below this one and implements
// [Fluid]. The heat of an open stream between two states is
//
//	Q = m · (h(T2, p2) − h(T1, p1))
//
// with h from the fluid's own formulation, never from a constant cp unless a
// user's own table says so. A closed vessel takes up ΔU at constant volume, ΔH at
// constant pressure. Every fluid knows its range and refuses outside it with a
// [*RangeError]; nothing is clamped or extrapolated.
package thermo

import "fmt"

// R is the molar gas constant in J/(mol K), exact since the 2019 SI (CODATA 2018).
const R = 8.31446261815324

// Properties are those of one homogeneous state.
type Properties struct {
	Enthalpy       float64 // h, J/kg; only differences within one fluid mean anything
	InternalEnergy float64 // u = h − p/ρ, J/kg
	Cp             float64 // (∂h/∂T)p, J/(kg K)
	Cv             float64 // (∂u/∂T)v, J/(kg K)
	Density        float64 // ρ, kg/m³
}

// Phase tells which single phase a fluid stands for.
type Phase uint8

const (
	Liquid Phase = iota + 1
	Gas
	Solid
)

func (p Phase) String() string {
	switch p {
	case Liquid:
		return "liquid"
	case Gas:
		return "gas"
	case Solid:
		return "solid"
	}
	return fmt.Sprintf("Phase(%d)", uint8(p))
}

// Bounds are the limits of a formulation: temperatures in K, absolute pressures
// in Pa. A fluid may refuse more than the box says (its phase ends within it).
type Bounds struct {
	MinT, MaxT float64 // K
	MinP, MaxP float64 // Pa, absolute
}

// Fluid is one substance or mixture in one phase.
//
// Implementations are immutable, safe for use by many goroutines at once, and
// evaluate a state without allocating.
type Fluid interface {
	// Name is the fluid as an engineer writes it: "water", "propylene glycol 32 %".
	Name() string
	// Source cites the formulation in one line.
	Source() string
	Phase() Phase
	Bounds() Bounds
	// Span returns the temperatures in K between which the fluid is its one
	// phase at the absolute pressure p in Pa: freezing and boiling point of a
	// liquid, dew point of a gas. A side without a limit is 0 or +Inf.
	Span(p float64) (lo, hi float64)
	// At returns the properties at temperature T in K and absolute pressure p
	// in Pa. The error is a *RangeError when the state lies outside the
	// fluid's range.
	At(T, p float64) (Properties, error)
	// Uncertainty returns the relative standard uncertainties of cp (and so of
	// an enthalpy difference) and of density at T in K and p in Pa, as
	// fractions. Outside of the fluid's range they mean nothing.
	Uncertainty(T, p float64) (cp, density float64)
	// MolarMass is in kg/mol; 0 where the fluid has none to speak of.
	MolarMass() float64
}

// Balance is what a heat balance needs of one state.
type Balance struct {
	Enthalpy float64 // h, J/kg
	Cp       float64 // J/(kg K)
	Density  float64 // kg/m³
}

// Balancer is a fluid that works a [Balance] in less time than all of its
// [Properties]. The figures are those of At, and so are the errors.
type Balancer interface {
	Fluid
	Balance(T, p float64) (Balance, error)
}

// BalanceOf returns the function that works a [Balance] of f: the fluid's own where
// it is a [Balancer], else a part of its At.
func BalanceOf(f Fluid) func(T, p float64) (Balance, error) {
	if b, ok := f.(Balancer); ok {
		return b.Balance
	}
	return func(T, p float64) (Balance, error) {
		s, err := f.At(T, p)
		return Balance{s.Enthalpy, s.Cp, s.Density}, err
	}
}

// Wet is a gas whose vapour condenses below the lower end of its Span, while the
// sensible part of its heat stays well defined: that of the same composition,
// cooled on without condensing.
type Wet interface {
	Fluid
	// Sensible is At, but not refused below the dew point.
	Sensible(T, p float64) (Properties, error)
}

// MoistureKind tells which quantity of the humidity of air is known.
type MoistureKind uint8

const (
	HumidityRatio    MoistureKind = iota + 1 // kg of vapour per kg of dry air
	RelativeHumidity                         // partial pressure over that at saturation, 0 to 1
	DewPoint                                 // K
	WetBulb                                  // thermodynamic wet-bulb temperature, K
)

// Moisture is a humidity as it is measured: Value in the unit of its kind.
type Moisture struct {
	Kind  MoistureKind
	Value float64
}

// Humid is a gas whose vapour content is measured beside the stream.
type Humid interface {
	Fluid
	// Carrying returns the gas with the moisture m, measured where the
	// temperature is T in K and the absolute pressure p in Pa. The error says
	// which figure is out of range.
	Carrying(m Moisture, T, p float64) (Wet, error)
}

// RangeError says that a state lies outside a fluid's range, and which bound it
// passed. It is returned by [Fluid.At].
type RangeError struct {
	Fluid    string  // name of the fluid
	Quantity string  // "temperature", "pressure"
	Value    float64 // K or Pa
	Bound    float64 // K or Pa
	Below    bool    // true where Value < Bound and should not be
	Why      string  // what the bound is: "freezing point", "saturation", "range of IAPWS-IF97 region 1"
}

func (e *RangeError) Error() string {
	side := "above"
	if e.Below {
		side = "below"
	}
	return fmt.Sprintf("%s: %s %s is %s %s (%s)", e.Fluid, e.Quantity, e.show(e.Value), side, e.show(e.Bound), e.Why)
}

func (e *RangeError) show(v float64) string {
	if e.Quantity == "temperature" {
		return fmt.Sprintf("%.6g °C", v-273.15)
	}
	return fmt.Sprintf("%.6g kPa", v/1e3)
}
