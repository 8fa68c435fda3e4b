package gas

import (
	"errors"
	"fmt"
	"maps"

	"heatreeve/thermo"
)

// Combustion is the air that a fuel burns with: dry air of the composition of [DryAir] and its
// humidity. One of excess and oxygen left is given: of the dry gas, as an analyser behind a cooler
// has it, or of the wet one, as a zirconia probe in the duct has it.
type Combustion struct {
	ExcessAir     float64 // air beyond the stoichiometric, as a fraction of it: 0.2 for 20 %
	DryO2         float64 // mole fraction of O2 in the dry flue gas; 0: not given
	WetO2         float64 // mole fraction of O2 in the flue gas as it is; 0: not given
	HumidityRatio float64 // kg of vapour per kg of dry air
	Model         Model   // how the properties of the flue gas are found
}

// Flue is a flue gas.
type Flue struct {
	Fluid             thermo.Fluid       // by the model of the Combustion
	Fractions         map[string]float64 // mole fractions, water vapour among them
	PerFuel           float64            // kg of flue gas per kg of fuel
	DryAir            float64            // kg of dry air burnt with, per kg of fuel
	StoichiometricAir float64            // kg of dry air that would just do, per kg of fuel
	ExcessAir         float64            // as a fraction
}

// FlueGas returns the flue gas of a complete combustion: all carbon to CO2, hydrogen to H2O,
// sulfur to SO2, nitrogen to N2, with the rest of the air. There is no CO, soot, NOx or SO3, ash
// leaves as a solid, and HCl in the fuel stays as it is. The acid dew point that SO3 would
// make is not modelled. The error says which figure of fuel or air is out of range, that
// nothing burns, or that the model is not for a mixture.
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
	vapour := air.molarMass() * c.HumidityRatio / (2*massH + massO) // mol/mol
	moles := c.air(b, least, vapour)
	if !(moles >= least) {
		return Flue{}, fmt.Errorf("no excess of air leaves oxygen of %g in the wet flue gas when the air brings %g kg/kg of vapour", c.WetO2, c.HumidityRatio)
	}
	b.breathe(air, moles, vapour)

	f := Flue{
		DryAir:            moles * air.molarMass() / b.mass,
		StoichiometricAir: least * air.molarMass() / b.mass,
		ExcessAir:         moles/least - 1,
	}
	f.Fractions, f.PerFuel = b.shares()
	gas, err := New(f.Fractions, c.Model)
	if err != nil {
		return Flue{}, err
	}
	f.Fluid = burntGas{gas}
	return f, nil
}

// burntGas tells its reader what it is taken to be.
type burntGas struct{ thermo.Fluid }

func (b burntGas) Source() string {
	return "products of a complete combustion (all carbon to CO2, hydrogen to H2O, sulfur to SO2); " + b.Fluid.Source()
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
	case !(c.WetO2 >= 0 && c.WetO2 < 0.205):
		return fmt.Errorf("oxygen in the wet flue gas is %g; its mole fraction lies from 0 to below 0.205", c.WetO2)
	case c.ExcessAir > 0 && c.DryO2 > 0:
		return fmt.Errorf("excess air of %g and oxygen of %g are both given; give one", c.ExcessAir, c.DryO2)
	case c.ExcessAir > 0 && c.WetO2 > 0:
		return fmt.Errorf("excess air of %g and oxygen in the wet gas of %g are both given; give one", c.ExcessAir, c.WetO2)
	case c.DryO2 > 0 && c.WetO2 > 0:
		return fmt.Errorf("oxygen of %g dry and %g wet are both given; give one", c.DryO2, c.WetO2)
	case !(c.HumidityRatio >= 0 && c.HumidityRatio <= 0.5):
		return fmt.Errorf("humidity ratio of the combustion air is %g kg/kg; it lies from 0 to 0.5", c.HumidityRatio)
	}
	return nil
}

// air is how many moles of dry air are burnt with. With oxygen y left in the dry gas, of which
// burnt is b.dry without the air,
//
//	y · (dry + L − need) = x·L − need
//
// and in the wet gas the same with all products and the air with its vapour, v moles a mole,
//
//	y · (dry + H2O + L·(1 + v) − need) = x·L − need
func (c Combustion) air(b *burnt, least, vapour float64) float64 {
	if y := c.DryO2; y > 0 {
		return (b.need + y*(b.dry()-b.need)) / (oxygenOfAir - y)
	}
	if y := c.WetO2; y > 0 {
		return (b.need + y*(b.dry()+b.moles["H2O"]-b.need)) / (oxygenOfAir - y*(1+vapour))
	}
	return least * (1 + c.ExcessAir)
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

// breathe adds moles of dry air, each with moles of vapour, less the oxygen burnt.
func (b *burnt) breathe(air *ingredient, moles, vapour float64) {
	for _, p := range air.parts {
		b.moles[p.formula] += moles * p.share
	}
	b.moles["O2"] = max(0, b.moles["O2"]-b.need)
	b.moles["H2O"] += moles * vapour
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
