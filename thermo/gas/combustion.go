package gas

import (
	"errors"
	"fmt"
	"maps"
	"math"

	"heatreeve/thermo"
)

// Fuel is what burns: a gas by its mole fractions, or any fuel by the elements in it. One
// of the two is given.
type Fuel struct {
	Gas  map[string]float64 // mole fractions, as for New
	Mass Elements
}

// Elements are the mass fractions of a fuel as it is fired. They add up to 1.
type Elements struct {
	C, H, O, N, S float64 // without those of the water
	Water, Ash    float64
}

// Combustion is the air that a fuel burns with: dry air of the composition of [DryAir] and its
// humidity. Either the excess or the oxygen left is given.
type Combustion struct {
	ExcessAir     float64 // air beyond the stoichiometric, as a fraction of it: 0.2 for 20 %
	DryO2         float64 // mole fraction of O2 in the dry flue gas; 0: ExcessAir holds
	HumidityRatio float64 // kg of vapour per kg of dry air
}

// Flue is a flue gas.
type Flue struct {
	Fluid             thermo.Fluid       // by the model Best
	Fractions         map[string]float64 // mole fractions, water vapour among them
	PerFuel           float64            // kg of flue gas per kg of fuel
	DryAir            float64            // kg of dry air burnt with, per kg of fuel
	StoichiometricAir float64            // kg of dry air that would just do, per kg of fuel
	ExcessAir         float64            // as a fraction
}

// FlueGas returns the flue gas of a complete combustion: all carbon to CO2, hydrogen to H2O,
// sulfur to SO2, nitrogen to N2, with the rest of the air. There is no CO, soot, NOx or SO3, ash
// leaves as a solid, and HCl in the fuel stays as it is. The acid dew point that SO3 would
// make is not modelled. The error says which figure of fuel or air is out of range, or that
// nothing burns.
func FlueGas(fuel Fuel, c Combustion) (Flue, error) {
	if err := c.check(); err != nil {
		return Flue{}, err
	}
	b, err := fuel.burn()
	if err != nil {
		return Flue{}, err
	}
	if !(b.need > 0) {
		return Flue{}, errors.New("nothing in the fuel needs air to burn; give carbon, hydrogen or sulfur that is not burnt yet")
	}
	air, _ := lookup(dryAir)
	least := b.need / oxygenOfAir
	moles := c.air(b, least)
	b.breathe(air, moles, c.HumidityRatio)

	f := Flue{
		DryAir:            moles * air.molarMass() / b.mass,
		StoichiometricAir: least * air.molarMass() / b.mass,
		ExcessAir:         moles/least - 1,
	}
	f.Fractions, f.PerFuel = b.shares()
	f.Fluid, err = New(f.Fractions, Best)
	return f, err
}

// Dry returns the mole fractions without the water vapour, as a gas analyser sees them.
func (f Flue) Dry() map[string]float64 {
	out := maps.Clone(f.Fractions)
	delete(out, "H2O")
	for k := range out {
		out[k] /= 1 - f.Fractions["H2O"]
	}
	return out
}

// oxygenOfAir is the mole fraction of O2 in dry air.
const oxygenOfAir = 0.209476

func (c Combustion) check() error {
	switch {
	case !(c.ExcessAir >= 0 && c.ExcessAir <= 100):
		return fmt.Errorf("excess air is %g; it lies from 0 to 100 times the air needed", c.ExcessAir)
	case !(c.DryO2 >= 0 && c.DryO2 < 0.205):
		return fmt.Errorf("oxygen in the dry flue gas is %g; its mole fraction lies from 0 to below 0.205", c.DryO2)
	case c.ExcessAir > 0 && c.DryO2 > 0:
		return fmt.Errorf("excess air of %g and oxygen of %g are both given; give one", c.ExcessAir, c.DryO2)
	case !(c.HumidityRatio >= 0 && c.HumidityRatio <= 0.5):
		return fmt.Errorf("humidity ratio of the combustion air is %g kg/kg; it lies from 0 to 0.5", c.HumidityRatio)
	}
	return nil
}

// air is how many moles of dry air are burnt with. With oxygen y left in the dry gas, of which
// burnt is b.dry without the air,
//
//	y · (dry + L − need) = x·L − need
func (c Combustion) air(b *burnt, least float64) float64 {
	if y := c.DryO2; y > 0 {
		return (b.need + y*(b.dry()-b.need)) / (oxygenOfAir - y)
	}
	return least * (1 + c.ExcessAir)
}

// burnt is a fuel after complete combustion.
type burnt struct {
	mass  float64            // kg of fuel, ash included
	need  float64            // mol of O2 that it takes; O2 of the products is counted below
	moles map[string]float64 // products by formula
}

// Atomic masses in kg/mol, those within the molar masses of the NASA file.
const (
	massC = 12.0107e-3
	massH = 1.00794e-3
	massO = 15.9994e-3
	massN = 14.0067e-3
	massS = 32.065e-3
)

// atoms of a molecule; what holds none of them passes the flame as it is.
type atoms struct{ C, H, O, N, S float64 }

var atomsOf = map[string]atoms{
	"N2": {N: 2}, "O2": {O: 2}, "CO2": {C: 1, O: 2}, "CO": {C: 1, O: 1}, "H2O": {H: 2, O: 1}, "H2": {H: 2},
	"CH4": {C: 1, H: 4}, "C2H6": {C: 2, H: 6}, "C3H8": {C: 3, H: 8}, "C4H10": {C: 4, H: 10}, "C5H12": {C: 5, H: 12},
	"C2H4": {C: 2, H: 4}, "NH3": {N: 1, H: 3}, "SO2": {S: 1, O: 2}, "H2S": {H: 2, S: 1},
	"NO": {N: 1, O: 1}, "NO2": {N: 1, O: 2}, "N2O": {N: 2, O: 1},
}

func (f Fuel) burn() (*burnt, error) {
	switch given := f.Mass != (Elements{}); {
	case given && len(f.Gas) > 0:
		return nil, errors.New("the fuel is given as a gas and by its elements; give one")
	case given:
		return f.Mass.burn()
	}
	c, err := compose(f.Gas, "mole fraction")
	if err != nil {
		return nil, fmt.Errorf("fuel: %w", err)
	}
	b := &burnt{moles: map[string]float64{}}
	var sum atoms
	for _, p := range c.parts {
		b.mass += p.share * p.molarMass
		a, known := atomsOf[p.formula]
		switch {
		case p.formula == "Cl2":
			return nil, errors.New("fuel: chlorine does not burn completely to one product; leave Cl2 out")
		case !known:
			b.moles[p.formula] += p.share
		}
		sum.add(a, p.share)
	}
	b.add(sum)
	return b, nil
}

func (a *atoms) add(o atoms, n float64) {
	a.C += n * o.C
	a.H += n * o.H
	a.O += n * o.O
	a.N += n * o.N
	a.S += n * o.S
}

func (e Elements) burn() (*burnt, error) {
	sum := 0.0
	for _, x := range []float64{e.C, e.H, e.O, e.N, e.S, e.Water, e.Ash} {
		if !(x >= 0 && x <= 1) {
			return nil, fmt.Errorf("fuel: a share is %g; a mass fraction lies from 0 to 1", x)
		}
		sum += x
	}
	if !(math.Abs(sum-1) <= sumTolerance) {
		return nil, fmt.Errorf("fuel: the mass fractions add up to %.6g; they must make 1 within %g", sum, sumTolerance)
	}
	b := &burnt{mass: sum, moles: map[string]float64{}}
	b.add(atoms{e.C / massC, e.H / massH, e.O / massO, e.N / massN, e.S / massS})
	b.moles["H2O"] += e.Water / (2*massH + massO)
	return b, nil
}

func (b *burnt) add(a atoms) {
	b.need += a.C + a.H/4 + a.S - a.O/2
	b.moles["CO2"] += a.C
	b.moles["H2O"] += a.H / 2
	b.moles["SO2"] += a.S
	b.moles["N2"] += a.N / 2
}

// dry is the moles of dry products.
func (b *burnt) dry() float64 {
	var sum float64
	for _, s := range table { // one order, so one result to the last bit
		if s.formula != "H2O" {
			sum += b.moles[s.formula]
		}
	}
	return sum
}

// breathe adds moles of dry air, with its humidity, less the oxygen burnt.
func (b *burnt) breathe(air *ingredient, moles, humidityRatio float64) {
	for _, p := range air.parts {
		b.moles[p.formula] += moles * p.share
	}
	b.moles["O2"] = max(0, b.moles["O2"]-b.need)
	b.moles["H2O"] += moles * air.molarMass() * humidityRatio / (2*massH + massO)
}

// shares are the mole fractions, and the kg of all per kg of fuel.
func (b *burnt) shares() (fractions map[string]float64, perFuel float64) {
	var moles, mass float64
	for _, s := range table {
		moles += b.moles[s.formula]
		mass += b.moles[s.formula] * s.molarMass
	}
	fractions = map[string]float64{}
	for formula, n := range b.moles {
		if n > 0 {
			fractions[formula] = n / moles
		}
	}
	return fractions, mass / b.mass
}
