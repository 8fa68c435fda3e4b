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

// newBest returns the reference equation where there is one, else Peng and Robinson.
func newBest(c composition) thermo.Fluid {
	f, ok := referenceOf(c)
	if !ok {
		return newCubic(c)
	}
	if g, ends := f.(helmholtz.Gas); ends && g.Bounds().MaxT < maxT {
		return newExtended(g, c)
	}
	return f
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
