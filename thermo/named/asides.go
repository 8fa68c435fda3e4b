package named

import (
	"slices"

	"heatreeve/thermo/oil"
)

// aside is a name of the trade for a fluid of the list. The numbers of refrigerants are
// those of ASHRAE 34 (from memory).
type aside struct{ name, of string }

func asides() []aside {
	return slices.Concat(
		called("water", "hot water", "pressurised hot water", "pressurised water", "cold water", "warm water", "chilled water", "cooling water", "ice water", "tap water", "fresh water", "process water",
			"feed water", "boiler feed water", "boiler water", "district heating water", "demineralised water", "deionised water", "condensate", "R718"),
		called("dry air", "compressed air", "instrument air", "hot air", "combustion air", "R729"),
		called("potassium formate", "K-formate"), called("potassium acetate", "K-acetate"), called("potassium carbonate", "potash"),
		called("ethylene glycol", "ethylen glycol"), called("propylene glycol", "propylen glycol"),
		called("calcium chloride", "calcium brine"),
		called("liquid nitrogen", "LIN"), called("liquid oxygen", "LOX"),
		refrigerantNumbers(),
	)
}

func called(of string, names ...string) (as []aside) {
	for _, name := range names {
		as = append(as, aside{name, of})
	}
	return as
}

func refrigerantNumbers() (as []aside) {
	liquids := make(map[string]string)
	for _, w := range liquefied() {
		liquids[w.also[0]] = w.name
	}
	for _, r := range []aside{
		{"R717", "NH3"}, {"R744", "CO2"}, {"R290", "C3H8"}, {"R600", "C4H10"}, {"R601", "C5H12"}, {"R170", "C2H6"}, {"R50", "CH4"}, {"R1150", "C2H4"},
		{"R728", "N2"}, {"R732", "O2"}, {"R740", "Ar"}, {"R702", "H2"}, {"R704", "He"}, {"R764", "SO2"}, {"R744A", "N2O"},
	} {
		as = append(as, r)
		if liquid, ok := liquids["liquid "+r.of]; ok {
			as = append(as, aside{"liquid " + r.name, liquid})
		}
	}
	return as
}

// products are petroleum liquids by their names of the trade. Diesel and its like are
// the distillate of their density: they lie on both sides of a limit of ASTM D1250.
func products() (ws []*word) {
	for _, p := range []struct{ name, sample, group string }{
		{"diesel", "840 kg/m3", ""}, {"diesel oil", "840 kg/m3", ""}, {"diesel fuel", "840 kg/m3", ""}, {"gas oil", "845 kg/m3", ""}, {"marine gas oil", "855 kg/m3", ""},
		{"heating oil", "845 kg/m3", ""}, {"light fuel oil", "845 kg/m3", ""},
		{"HFO", "960 kg/m3", "fuel oil"}, {"heavy fuel oil", "960 kg/m3", "fuel oil"}, {"bunker oil", "960 kg/m3", "fuel oil"},
		{"hydraulic oil", "870 kg/m3", "lubricating oil"}, {"gear oil", "890 kg/m3", "lubricating oil"}, {"turbine oil", "870 kg/m3", "lubricating oil"},
		{"engine oil", "880 kg/m3", "lubricating oil"},
	} {
		ws = append(ws, ofGroup(p.group, p.name, p.sample))
	}
	for _, group := range oil.Groups() {
		for _, name := range oil.GroupAliases(group) {
			w := ofGroup(group, name, densities[group])
			w.main = group
			ws = append(ws, w)
		}
	}
	for _, w := range ws {
		w.aside = true
	}
	return ws
}
