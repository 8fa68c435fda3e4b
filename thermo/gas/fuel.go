package gas

import (
	"errors"
	"fmt"
	"math"
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
