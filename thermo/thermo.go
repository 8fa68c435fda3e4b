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
