package site

import (
	"heatreeve/thermo"
	"heatreeve/thermo/gas"
)

// chosen is a gas by a model that the declaration chose, which its name tells: by another
// its figures would be others.
type chosen struct {
	thermo.Fluid
	balance func(T, p float64) (thermo.Balance, error)
	model   gas.Model
}

// by tells the model of f, unless it is the best.
func by(model gas.Model, f thermo.Fluid, err error) (thermo.Fluid, error) {
	if err != nil || model == gas.Best {
		return f, err
	}
	return chosen{f, thermo.BalanceOf(f), model}, nil
}

func (c chosen) Name() string { return c.Fluid.Name() + ", model: " + c.model.String() }

func (c chosen) Balance(T, p float64) (thermo.Balance, error) { return c.balance(T, p) }
