package site

import (
	"heatreeve/thermo"
	"heatreeve/thermo/gas"
	"heatreeve/thermo/unit"
)

// flueGas reads the gas of a complete combustion, such as
// {fuel: {CH4: 92 %, C2H6: 8 %}, excess air: 15 %}. A fuel is by volume, its elements
// are by mass; the air is told by its excess or by the oxygen left in the dry flue gas.
func flueGas(_ *reader, d declaration) thermo.Fluid {
	o := d.v.object("fluids.*.flue gas")
	before := len(d.v.faults)
	fuel, air := o.fuel(), o.combustionAir()
	model, ok := d.o.model()
	if !ok || len(d.v.faults) > before {
		return nil
	}
	flue, err := gas.FlueGas(fuel, air)
	f := flue.Fluid
	if err == nil && model != gas.Best {
		f, err = gas.New(flue.Fractions, model)
	}
	return d.v.made(f, err)
}

func (o object) fuel() (f gas.Fuel) {
	asGas, isGas := o.get("fuel")
	elements, isElements := o.get("elements")
	switch {
	case isGas && isElements:
		elements.fault("stands beside fuel; a fuel is a gas by volume or its elements by mass")
	case isGas:
		f.Gas, _ = asGas.shares(species(), "shares by volume, such as {CH4: 92 %, C2H6: 8 %}")
	case isElements:
		shares, _ := elements.shares(keys["fluids.*.flue gas.elements"], "shares by mass, such as {C: 86 %, H: 13 %, S: 1 %}")
		f.Mass = gas.Elements{
			C: shares["C"], H: shares["H"], O: shares["O"], N: shares["N"], S: shares["S"], Water: shares["water"], Ash: shares["ash"],
		}
	default:
		o.need("fuel", "the fuel by volume, such as fuel: {CH4: 92 %, C2H6: 8 %}; or its elements by mass, such as elements: {C: 86 %, H: 14 %}")
	}
	return f
}

func (o object) combustionAir() (c gas.Combustion) {
	excess, isExcess := o.get("excess air")
	oxygen, isOxygen := o.get("oxygen")
	switch {
	case isExcess && isOxygen:
		oxygen.fault("stands beside excess air; one of the two tells the air")
	case isExcess:
		c.ExcessAir, _ = excess.within(0, 100, "0 % to 10 000 %", unit.Ratio)
	case isOxygen:
		c.DryO2, _ = oxygen.within(1e-6, 0.2, "more than 0 % up to 20 % of the dry gas", unit.Ratio)
	default:
		o.need("excess air", "the air beyond what the fuel needs, such as excess air: 15 %; or oxygen: 3 %, what is left in the dry flue gas")
	}
	if v, ok := o.get("air humidity"); ok {
		if q, ok := v.quantity(unit.Ratio); ok {
			v.inUnits(q.Unit, []string{"g/kg", "kg/kg"})
			c.HumidityRatio = q.SI()
		}
	}
	return c
}
