package site

import (
	"heatreeve/thermo"
	"heatreeve/thermo/food"
)

// foodstuff reads a liquid food by the mass fractions that its analysis found, such as
// {water: 87.3 %, fat: 3.9 %, protein: 3.3 %, carbohydrate: 4.7 %, ash: 0.8 %}.
func foodstuff(_ *reader, d declaration) thermo.Fluid {
	s, ok := d.v.shares(keys["fluids.*.food"], "shares by mass, such as {water: 87.3 %, fat: 3.9 %, protein: 3.3 %, carbohydrate: 4.7 %, ash: 0.8 %}", byMass)
	if !ok {
		return nil
	}
	f, err := food.New(food.Composition{
		Water: s["water"], Fat: s["fat"], Protein: s["protein"], Carbohydrate: s["carbohydrate"], Fibre: s["fibre"], Ash: s["ash"],
	})
	return d.v.made(f, err)
}
