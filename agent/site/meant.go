package site

import (
	"slices"
	"strings"

	"heatreeve/thermo/unit/near"
)

// otherwise are keys by which people call what has another key here, in small letters.
var otherwise = map[string][]string{
	"nitrogen": {"N2"}, "oxygen": {"O2"}, "argon": {"Ar"}, "carbon dioxide": {"CO2"}, "carbon monoxide": {"CO"}, "hydrogen": {"H2", "H"}, "helium": {"He"},
	"methane": {"CH4"}, "ethane": {"C2H6"}, "propane": {"C3H8"}, "butane": {"C4H10"}, "n-butane": {"C4H10"}, "pentane": {"C5H12"}, "n-pentane": {"C5H12"},
	"ethylene": {"C2H4"}, "ethene": {"C2H4"}, "ammonia": {"NH3"}, "sulfur dioxide": {"SO2"}, "sulphur dioxide": {"SO2"}, "hydrogen sulfide": {"H2S"},
	"hydrogen sulphide": {"H2S"}, "chlorine": {"Cl2"}, "water": {"H2O"}, "steam": {"H2O"}, "water vapour": {"H2O"}, "moisture": {"H2O", "water"}, "air": {"dry air"},
	"carbon": {"C"}, "sulfur": {"S"}, "sulphur": {"S"}, "o2": {"oxygen", "wet oxygen", "O2"}, "excess": {"excess air"}, "lambda": {"excess air"}, "humidity": {"air humidity", "relative humidity"},
	"rh": {"relative humidity"}, "temperature": {"at"}, "w": {"humidity ratio"}, "carbohydrates": {"carbohydrate"}, "sugar": {"carbohydrate"}, "lactose": {"carbohydrate"},
	"fiber": {"fibre"}, "minerals": {"ash"}, "salt": {"ash", "sodium chloride"}, "solids": {"carbohydrate"}, "api": {"api gravity"}, "rho": {"density"}, "kw": {"watson"},
	"watson k": {"watson"}, "watson factor": {"watson"}, "glycol": {"ethylene glycol", "propylene glycol"}, "meg": {"ethylene glycol"}, "mpg": {"propylene glycol"},
	"oil": {"petroleum", "table"}, "brine": {"sodium chloride", "calcium chloride", "seawater"}, "milk": {"food"},
	"rolls over": {"rolls_over_at"}, "roll over": {"rolls_over_at"}, "rollover": {"rolls_over_at"}, "modulus": {"rolls_over_at"}, "max rate": {"largest"}, "heartbeat": {"alive", "topic"},
	"counter": {"counts"}, "timeout": {"within"}, "mass": {"content"}, "volume": {"content"}, "level": {"content"}, "wall": {"shell"}, "meter": {"witness", "meter_at"},
}

// meant are the keys that one that is unknown was probably to be.
func meant(key string, allowed []string) []string {
	var names []string
	for _, name := range otherwise[strings.ToLower(strings.ReplaceAll(key, "_", " "))] {
		if slices.Contains(allowed, name) {
			names = append(names, name)
		}
	}
	if len(names) == 0 {
		names = near.Names(key, allowed)
	}
	return names
}
