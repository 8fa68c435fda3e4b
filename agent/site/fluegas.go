package site

import (
	"heatreeve/thermo"
	"heatreeve/thermo/gas"
	"heatreeve/thermo/unit"
)

// flueGas reads the gas of a complete combustion, such as
// {fuel: {CH4: 92 %, C2H6: 8 %}, excess air: 15 %}. A fuel is by volume, its elements
// are by mass; the air is told by its excess or by the oxygen left in the flue gas.
func flueGas(_ *reader, d declaration) thermo.Fluid {
	before := len(d.v.faults)
	o := d.v.object("fluids.*.flue gas")
	fuel, air := o.fuel(), o.combustionAir()
	model, ok := d.o.model()
	if !ok || len(d.v.faults) > before {
		return nil
	}
	air.Model = model
	flue, err := gas.FlueGas(fuel, air)
	return d.v.made(by(model, flue.Fluid, err))
}

func (o object) fuel() (f gas.Fuel) {
	asGas, isGas := o.get("fuel")
	elements, isElements := o.get("elements")
	switch {
	case isGas && isElements:
		elements.fault("stands beside fuel; a fuel is a gas by volume or its elements by mass")
	case isGas:
		f.Gas, _ = asGas.shares(species(), "shares by volume, such as {CH4: 92 %, C2H6: 8 %}", byVolume("; a fuel by mass is told by its elements"))
	case isElements:
		shares, _ := elements.shares(keys["fluids.*.flue gas.elements"], "shares by mass, such as {C: 86 %, H: 13 %, S: 1 %}", byMass)
		f.Mass = gas.Elements{
			C: shares["C"], H: shares["H"], O: shares["O"], N: shares["N"], S: shares["S"], Water: shares["water"], Ash: shares["ash"],
		}
	default:
		o.need("fuel", "the fuel by volume, such as fuel: {CH4: 92 %, C2H6: 8 %}; or its elements by mass, such as elements: {C: 86 %, H: 14 %}", "elements")
	}
	return f
}

// combustionAir reads what tells the air: its excess, or the oxygen left in the flue gas,
// dry as an analyser behind a cooler has it or wet as a probe in the duct.
func (o object) combustionAir() (c gas.Combustion) {
	found := ""
	for _, m := range [...]struct {
		key  string
		to   *float64
		lo   float64
		hi   float64
		span string
	}{
		{"excess air", &c.ExcessAir, 0, 100, "0 % to 10 000 %"},
		{"oxygen", &c.DryO2, 1e-6, 0.2, "more than 0 % up to 20 % of the dry gas"},
		{"wet oxygen", &c.WetO2, 1e-6, 0.2, "more than 0 % up to 20 % of the wet gas"},
	} {
		v, ok := o.get(m.key)
		switch {
		case !ok:
		case found != "":
			v.fault("stands beside %s; one of them tells the air", found)
		default:
			found = m.key
			*m.to, _ = v.part(m.lo, m.hi, m.span, "")
		}
	}
	if found == "" {
		o.need("excess air", "the air beyond what the fuel needs, such as excess air: 15 %; or what is left of its oxygen, oxygen: 3 % of the dry flue gas or wet oxygen: 3 % of the flue gas as it is", "oxygen", "wet oxygen")
	}
	if v, ok := o.get("air humidity"); ok {
		if q, ok := v.quantity(unit.Ratio); ok {
			v.inUnits(q.Unit, []string{"g/kg", "kg/kg"})
			c.HumidityRatio = unit.Decimal(q.SI())
		}
	}
	return c
}
