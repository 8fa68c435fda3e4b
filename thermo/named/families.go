package named

import (
	"fmt"
	"slices"
	"sync"

	"heatreeve/thermo"
	"heatreeve/thermo/air"
	"heatreeve/thermo/aqueous"
	"heatreeve/thermo/food"
	"heatreeve/thermo/gas"
	"heatreeve/thermo/gas/helmholtz"
	"heatreeve/thermo/oil"
	"heatreeve/thermo/seawater"
	"heatreeve/thermo/solid"
	"heatreeve/thermo/unit"
	"heatreeve/thermo/water"
)

// words are all names, family by family.
var words = sync.OnceValue(func() []*word {
	return slices.Concat(waters(), gases(), liquefied(), airs(), solutions(), seas(), foods(), petroleums(), oils(), solids())
})

// otherwise finds what a family calls by more names than it lists.
var otherwise = []func(name string) (thermo.Fluid, error){
	func(name string) (thermo.Fluid, error) { return gas.New(map[string]float64{name: 1}, gas.Best) },
	food.Product,
	oil.HeatTransfer,
	solid.New,
}

func waters() []*word {
	return []*word{
		{name: "water", also: []string{"liquid water", "H2O"}, make: is(water.Liquid)},
		{name: "steam", also: []string{"superheated steam", "water vapour"}, make: is(water.Steam)},
	}
}

func gases() []*word {
	ws := []*word{{name: "dry air", also: []string{"air"}, make: func(strength) (thermo.Fluid, error) { return gas.DryAir(gas.Best) }}}
	for _, formula := range gas.Species() {
		if formula == "H2O" {
			continue // steam, by its own formulation
		}
		pure := func(strength) (thermo.Fluid, error) { return gas.New(map[string]float64{formula: 1}, gas.Best) }
		w := &word{name: formula, gas: true, make: pure}
		if f, err := pure(strength{}); err == nil && fold(f.Name()) != fold(formula) {
			w.name, w.also = f.Name(), []string{formula}
		}
		ws = append(ws, w)
	}
	return ws
}

// liquefied are the gases that have a liquid of their own: refrigerants and the
// like, under pressure or cold.
func liquefied() []*word {
	var ws []*word
	for _, formula := range helmholtz.Formulas() {
		if f, ok := helmholtz.Liquid(formula); ok {
			ws = append(ws, &word{name: f.Name(), also: []string{"liquid " + formula}, make: is(func() thermo.Fluid { return f })})
		}
	}
	return ws
}

// airs are moist air whose humidity a stream tells, and that of a humidity ratio.
func airs() []*word {
	return []*word{
		{name: "moist air", also: []string{"humid air"}, make: func(strength) (thermo.Fluid, error) { return air.Live(), nil }},
		{
			name: "moist air", also: []string{"humid air"}, dimension: unit.Ratio, sample: "8 g/kg",
			make: func(s strength) (thermo.Fluid, error) {
				if s.Unit.Symbol == "%" {
					return nil, fmt.Errorf("moist air %v: want its humidity ratio in g/kg; a relative humidity stands beside the stream, or in {moist air: {relative humidity: 50 %%, at: 25 °C}}", s.Quantity)
				}
				return fluid(air.Moist(s.SI()))
			},
		},
	}
}

// solutions are the solutes in water, whose strength is exact as it is written.
func solutions() []*word {
	var ws []*word
	for _, solute := range aqueous.Solutes() {
		limits, err := aqueous.LimitsOf(solute)
		if err != nil {
			panic(err) // the family lists what it does not know
		}
		ws = append(ws, &word{
			name: solute, also: limits.Aliases, dimension: unit.Ratio, sample: "20 %", volume: limits.VolumeFraction > 0, solution: true,
			make: func(s strength) (thermo.Fluid, error) {
				if s.byVolume {
					return aqueous.NewByVolume(solute, s.SI(), 0)
				}
				return aqueous.New(solute, s.SI(), 0)
			},
		})
	}
	return ws
}

func seas() []*word {
	return []*word{{
		name: "seawater", dimension: unit.Ratio, sample: "35 g/kg",
		make: func(s strength) (thermo.Fluid, error) { return seawater.New(s.SI()) },
	}}
}

func foods() []*word { return listed(food.Products(), food.Product) }

// densities are those of the groups as they may be, at 15 °C.
var densities = map[string]string{
	"gasoline": "760 kg/m3", "transition": "780 kg/m3", "jet-kerosene": "800 kg/m3", "fuel oil": "900 kg/m3", "crude oil": "870 kg/m3", "lubricating oil": "880 kg/m3",
}

// petroleums are petroleum liquids by their density at 15 °C, of any distillate or of
// one product group.
func petroleums() []*word {
	ws := []*word{ofGroup("", "petroleum", "870 kg/m3")}
	for _, group := range oil.Groups() {
		ws = append(ws, ofGroup(group, group, densities[group]))
	}
	return ws
}

func ofGroup(group, name, sample string) *word {
	return &word{
		name: name, dimension: unit.Density, sample: sample,
		make: func(s strength) (thermo.Fluid, error) { return s.petroleum(group) },
	}
}

func oils() []*word { return listed(oil.HeatTransferLiquids(), oil.HeatTransfer) }

func solids() []*word { return listed(solid.Names(), solid.New) }

// listed are the names that a family lists, found by the family itself.
func listed(names []string, find func(string) (thermo.Fluid, error)) []*word {
	var ws []*word
	for _, name := range names {
		ws = append(ws, &word{name: name, make: func(strength) (thermo.Fluid, error) { return find(name) }})
	}
	return ws
}

// fluid widens the type of a family's own.
func fluid[F thermo.Fluid](f F, err error) (thermo.Fluid, error) {
	if err != nil {
		return nil, err
	}
	return f, nil
}

// is makes a fluid that has neither strength nor fault.
func is(f func() thermo.Fluid) func(strength) (thermo.Fluid, error) {
	return func(strength) (thermo.Fluid, error) { return f(), nil }
}
