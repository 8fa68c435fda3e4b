package named

import (
	"regexp"
	"strings"
	"sync"
)

// term is a name in use for several fluids, or for one that has to be declared.
type term struct {
	names  []string
	near   []string // names of the list that it may mean
	advice string   // what it is and how it is written, behind its name, or ""
}

const (
	milkDeclared  = "{food: {water: 87.3 %, fat: 3.9 %, protein: 3.3 %, carbohydrate: 4.7 %, ash: 0.8 %}}"
	tableDeclared = "{table: {source: data sheet, phase: liquid, points: [[20 °C, 1.9 kJ/(kg K), 868 kg/m3], [200 °C, 2.5 kJ/(kg K), 751 kg/m3]]}}"
	mixture       = "is a mixture; declare the shares of yours, such as "
	analysed      = "is known by its analysis; declare yours, such as "
	noFormulation = "has no formulation here; declare the figures of its data sheet, such as " + tableDeclared
	latent        = "gives latent heat, which is not worked here; \"steam\" is superheated, and \"water\" is the condensate"
)

// terms in the order in which they are looked through. The compositions are round and
// from memory; they show the form.
var terms = []term{
	{[]string{"glycol", "glycol water", "water glycol", "antifreeze"}, []string{"ethylene glycol", "propylene glycol"}, ""},
	{[]string{"brine", "salt water", "saltwater brine", "saline"}, []string{"sodium chloride", "calcium chloride", "magnesium chloride", "seawater"}, ""},
	{[]string{"alcohol", "spirit", "spirits"}, []string{"ethanol", "methanol"}, ""},
	{[]string{"LPG", "autogas"}, []string{"propane", "n-butane", "liquid propane", "liquid n-butane"}, ""},
	{[]string{"LNG"}, []string{"liquid methane"}, ""},
	{[]string{"anhydrous ammonia"}, []string{"ammonia", "liquid ammonia"}, ""},
	{[]string{"oil"}, []string{"petroleum", "fuel oil", "lubricating oil", "mineral oil A", "modified terphenyl"}, ""},
	{[]string{"ambient air", "outdoor air", "outside air", "fresh air", "supply air", "return air", "room air"}, []string{"moist air", "dry air"}, ""},
	{
		[]string{"thermal oil", "hot oil", "heat transfer oil", "heat transfer fluid", "heat transfer liquid", "thermal fluid", "HTF"},
		[]string{"mineral oil A", "mineral oil B", "modified terphenyl", "diphenyl oxide/biphenyl eutectic"},
		`may be "mineral oil A", "mineral oil B", "modified terphenyl" or "diphenyl oxide/biphenyl eutectic"; of any other declare the figures of its data sheet, such as ` + tableDeclared,
	},
	{[]string{"natural gas", "fuel gas", "town gas", "gas"}, nil, mixture + "{gas: {CH4: 92 %, C2H6: 5 %, CO2: 1 %, N2: 2 %}}"},
	{[]string{"biogas", "landfill gas", "sewage gas"}, nil, mixture + "{gas: {CH4: 60 %, CO2: 40 %}}"},
	{[]string{"syngas", "synthesis gas", "producer gas", "blast furnace gas", "coke oven gas", "process gas"}, nil, mixture + "{gas: {CO: 30 %, H2: 50 %, CO2: 15 %, CH4: 5 %}}"},
	{
		[]string{"flue gas", "fluegas", "smoke", "exhaust", "exhaust gas", "waste gas", "off gas", "combustion gas"}, nil,
		"is told by what burns; declare the fuel and its air, such as {flue gas: {fuel: {CH4: 92 %, C2H6: 8 %}, excess air: 15 %}}",
	},
	{[]string{"wet steam", "saturated steam", "flash steam"}, nil, latent},
	{[]string{"beer", "wine", "cider"}, nil, `holds alcohol, which a food has not; near: "beer wort", "ethanol 5 vol %"; or declare figures of your own, such as ` + tableDeclared},
	{[]string{"yogurt", "yoghurt", "kefir"}, nil, analysed + "{food: {water: 88 %, fat: 3.3 %, protein: 3.5 %, carbohydrate: 4.5 %, ash: 0.7 %}}"},
	{[]string{"apple juice", "grape juice", "fruit juice", "juice", "tomato juice", "soft drink"}, nil, analysed + "{food: {water: 88.2 %, protein: 0.1 %, fat: 0.1 %, carbohydrate: 11.3 %, ash: 0.3 %}}"},
	{[]string{"sugar solution", "sugar", "sucrose", "syrup", "sugar syrup", "glucose", "molasses"}, nil, "is a food of water and carbohydrate; declare yours, such as {food: {water: 40 %, carbohydrate: 60 %}} of 60 °Brix"},
	{
		[]string{"vegetable oil", "cooking oil", "frying oil", "edible oil", "rapeseed oil", "sunflower oil", "soybean oil", "palm oil", "olive oil", "lard", "tallow"}, nil,
		"is a food of fat; declare {food: {fat: 100 %}}",
	},
	{
		[]string{"caustic", "caustic soda", "NaOH", "sodium hydroxide", "lye", "sulfuric acid", "H2SO4", "hydrochloric acid", "nitric acid", "HNO3", "phosphoric acid",
			"black liquor", "molten salt", "solar salt", "urea", "silicone oil"},
		nil, noFormulation,
	},
}

var (
	refrigerant  = regexp.MustCompile(`^(liquid)?r\d+[a-z]*$`)
	refrigerants = term{
		advice: "is a refrigerant without a formulation here; those with one: R717 ammonia, R744 carbon dioxide, R290 propane, R600 n-butane, R170 ethane; " +
			"of another declare figures of your own, such as " + tableDeclared,
	}
)

var tradeIndex = sync.OnceValue(func() map[string]*term {
	m := make(map[string]*term)
	for i := range terms {
		for _, name := range terms[i].names {
			m[termKey(name)] = &terms[i]
		}
	}
	return m
})

// termKey is a folded name without its strength, "glycol/water" like "glycol water".
func termKey(name string) string { return strings.ReplaceAll(bare(name), "/", "") }

// trade is what the trade means by a name, with a strength or without, or nil.
func trade(name string) *term {
	if t, ok := tradeIndex()[termKey(name)]; ok {
		return t
	}
	if refrigerant.MatchString(fold(name)) {
		return &refrigerants
	}
	return nil
}
