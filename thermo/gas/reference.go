package gas

import (
	"errors"
	"fmt"
	"strings"

	"heatreeve/thermo"
	"heatreeve/thermo/gas/helmholtz"
	"heatreeve/thermo/water"
)

// referenceOf returns the reference equation of state of a gas by itself or of dry air.
func referenceOf(c composition) (f thermo.Fluid, ok bool) {
	switch c.only {
	case "":
		return nil, false
	case dryAir:
		return helmholtz.Air(), true
	case "H2O":
		return newVapour(c.name), true
	}
	return helmholtz.New(c.only)
}

// referenced are the gases that have a reference equation.
func referenced() []string { return append([]string{dryAir, "H2O"}, helmholtz.Formulas()...) }

func newReference(c composition) (thermo.Fluid, error) {
	f, ok := referenceOf(c)
	if !ok {
		return nil, fmt.Errorf("there is no reference equation of state for %s; it has to be one of %s, or the model one of %v, %v, %v",
			c.name, strings.Join(referenced(), ", "), Best, PengRobinson, Ideal)
	}
	return reference{f}, nil
}

// reference is an equation of state that keeps to its own range.
type reference struct{ thermo.Fluid }

// At tells, beyond the highest temperature, which model goes on.
func (r reference) At(T, p float64) (thermo.Properties, error) {
	s, err := r.Fluid.At(T, p)
	if err != nil && T > r.Bounds().MaxT && T <= maxT && p <= beyondP {
		err = goesOn(err)
	}
	return s, err
}

func goesOn(err error) error {
	e := new(thermo.RangeError)
	if !errors.As(err, &e) || e.Quantity != "temperature" {
		return err
	}
	told := *e
	told.Why += fmt.Sprintf("; the model %v goes on to %.6g °C", Best, maxT-273.15)
	return &told
}

// beyondP is the highest pressure in Pa at which a gas goes on above the range of its reference
// equation.
const beyondP = 10e6

// extended is a reference equation and, above its highest temperature, Peng and Robinson
// from there on.
type extended struct {
	thermo.Fluid
	cubic *cubic
	top   float64 // K, the highest temperature of the equation
}

// newBest returns the reference equation where there is one, else Peng and Robinson.
func newBest(c composition) thermo.Fluid {
	f, ok := referenceOf(c)
	switch {
	case !ok:
		return newCubic(c)
	case f.Bounds().MaxT >= maxT:
		return f
	}
	return extended{f, newCubic(c), f.Bounds().MaxT}
}

// Source names both.
func (e extended) Source() string {
	return fmt.Sprintf("%s; above %.6g °C %s", e.Fluid.Source(), e.top-273.15, e.cubic.Source())
}

// Bounds are those of the equation, with more on top.
func (e extended) Bounds() thermo.Bounds {
	b := e.Fluid.Bounds()
	b.MaxT = maxT
	return b
}

// Span ends at the highest temperature of the equation where the pressure is above 10 MPa.
func (e extended) Span(p float64) (lo, hi float64) {
	lo, hi = e.Fluid.Span(p)
	if p > beyondP {
		hi = min(hi, e.top)
	}
	return lo, hi
}

// At carries on, above the highest temperature T0 of the equation, from what it leaves there by
// the differences in Peng and Robinson's equation:
//
//	h = h(T0) + hPR(T) − hPR(T0)    ρ = ρPR(T) · ρ(T0)/ρPR(T0)    cp = cpPR    cv = cvPR
//
// So h, u and the density have no step at T0; cp and cv have one as large as the two equations
// differ.
func (e extended) At(T, p float64) (thermo.Properties, error) {
	if !(T > e.top) {
		return e.Fluid.At(T, p)
	}
	if err := e.check(T, p); err != nil {
		return thermo.Properties{}, err
	}
	start, err1 := e.Fluid.At(e.top, p)
	from, err2 := e.cubic.At(e.top, p)
	at, err3 := e.cubic.At(T, p)
	for _, err := range [...]error{err1, err2, err3} {
		if err != nil {
			return thermo.Properties{}, err
		}
	}
	at.Enthalpy += start.Enthalpy - from.Enthalpy
	at.Density *= start.Density / from.Density
	at.InternalEnergy = at.Enthalpy - p/at.Density
	return at, nil
}

func (e extended) check(T, p float64) error {
	if err := e.Bounds().Check(e.Name(), T, p, "range of the ideal gas"); err != nil {
		return err
	}
	if p > beyondP {
		return &thermo.RangeError{Fluid: e.Name(), Quantity: "temperature", Value: T, Bound: e.top,
			Why: "range of the reference equation; only up to 10 MPa does Peng-Robinson go on from there"}
	}
	return nil
}

// Uncertainty is, above the highest temperature of the equation, that of Peng and Robinson, and in
// the density what it is where the equation ends.
func (e extended) Uncertainty(T, p float64) (cp, density float64) {
	if !(T > e.top) {
		return e.Fluid.Uncertainty(T, p)
	}
	cp, _ = e.cubic.Uncertainty(T, p)
	_, density = e.cubic.Uncertainty(e.top, p)
	return cp, density
}

// vapourOfWater is steam by IAPWS-IF97, under the name and on the zero of enthalpy of the other
// gases.
type vapourOfWater struct {
	thermo.Fluid
	balance func(T, p float64) (thermo.Balance, error)
	name    string
	zero    float64 // J/kg to be taken off
}

// newVapour has no enthalpy at 298.15 K and no pressure.
func newVapour(name string) thermo.Fluid {
	const p = 1 // Pa
	f := water.Steam()
	once, err1 := f.At(zero, p)
	twice, err2 := f.At(zero, 2*p)
	if err := errors.Join(err1, err2); err != nil {
		panic(err) // steam that is none at 298.15 K and 2 Pa
	}
	return vapourOfWater{f, thermo.BalanceOf(f), name, 2*once.Enthalpy - twice.Enthalpy}
}

func (v vapourOfWater) Name() string { return v.name }

// Bounds are those of steam, but the pressure begins where that of the other gases does.
func (v vapourOfWater) Bounds() thermo.Bounds {
	b := v.Fluid.Bounds()
	b.MinP = max(b.MinP, minP)
	return b
}

func (v vapourOfWater) At(T, p float64) (thermo.Properties, error) {
	if p < minP {
		return thermo.Properties{}, v.Bounds().Check(v.name, T, p, "range of a gas")
	}
	at, err := v.Fluid.At(T, p)
	if err != nil {
		return at, v.own(err)
	}
	at.Enthalpy -= v.zero
	at.InternalEnergy -= v.zero
	return at, nil
}

func (v vapourOfWater) Balance(T, p float64) (thermo.Balance, error) {
	if p < minP {
		return thermo.Balance{}, v.Bounds().Check(v.name, T, p, "range of a gas")
	}
	at, err := v.balance(T, p)
	if err != nil {
		return at, v.own(err)
	}
	at.Enthalpy -= v.zero
	return at, nil
}

// own puts the name of the gas to a refusal.
func (v vapourOfWater) own(err error) error {
	e := new(thermo.RangeError)
	if !errors.As(err, &e) {
		return err
	}
	named := *e
	named.Fluid = v.name
	return &named
}
