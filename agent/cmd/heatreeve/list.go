package main

import (
	"fmt"
	"io"
	"strings"
	"unicode/utf8"

	"heatreeve/thermo/named"
)

// listed is one name as --list --json prints it.
type listed struct {
	Form    string  `json:"fluid"`
	Example string  `json:"example"`
	Phase   string  `json:"phase"`
	MinT    float64 `json:"min_temperature_K"`
	MaxT    float64 `json:"max_temperature_K"`
	MinP    float64 `json:"min_pressure_Pa"`
	MaxP    float64 `json:"max_pressure_Pa"`
	Source  string  `json:"source"`
}

// tellFluids lists the fluids that have a name.
func tellFluids(w io.Writer, asJSON bool) error {
	entries := named.List()
	if asJSON {
		all := make([]listed, len(entries))
		for i, e := range entries {
			all[i] = listed{e.Form, e.Example, e.Phase.String(), e.Bounds.MinT, e.Bounds.MaxT, e.Bounds.MinP, e.Bounds.MaxP, e.Source}
		}
		return printJSON(w, all)
	}
	fmt.Fprint(w, "Each fluid with its range; pressures are absolute. N stands for a number, and\nthe range is that of the number in brackets. Phase and source stand below.\n\n")
	form := 0
	for _, e := range entries {
		form = max(form, utf8.RuneCountInString(e.Form))
	}
	for i, e := range entries {
		fmt.Fprintf(w, "%-*s  %s%s\n", form, e.Form, e.Range, ofExample(e))
		if last := i == len(entries)-1; last || entries[i+1].Source != e.Source || entries[i+1].Phase != e.Phase {
			fmt.Fprintln(w, indented(e.Phase.String()+"; "+e.Source, "      "))
		}
	}
	_, err := fmt.Fprint(w, ownFluids)
	return err
}

// ofExample is the strength or density that the example has in the place of N.
func ofExample(e named.Entry) string {
	name, _, ok := strings.Cut(e.Form, " N ")
	if !ok {
		return ""
	}
	return " (" + strings.TrimPrefix(e.Example, name+" ") + ")"
}

const ownFluids = `
Letter case, spaces and hyphens make no difference. Any other fluid is written
as in the fluids of a site file:
  '{propylene glycol: 30 %, by: volume, uncertainty: 1 %}'
  '{gas: {N2: 79 %, O2: 21 %}, by: mole, model: ideal}'
  '{flue gas: {fuel: {CH4: 92 %, C2H6: 8 %}, excess air: 15 %}}'
  '{flue gas: {elements: {C: 86 %, H: 13 %, S: 1 %}, oxygen: 3 %, air humidity: 8 g/kg}}'
  '{moist air: {relative humidity: 50 %, at: 25 °C, pressure: 100.9 kPa}}'
  '{seawater: 35 g/kg}'
  '{food: {water: 87.3 %, fat: 3.9 %, protein: 3.3 %, carbohydrate: 4.7 %, ash: 0.8 %}}'
  '{petroleum: {density: 870 kg/m3, watson: 11.8, group: crude oil}}'
  '{table: {source: data sheet, phase: liquid, points: [[20 °C, 1.9 kJ/(kg K), 868 kg/m3], [200 °C, 2.5 kJ/(kg K), 751 kg/m3]]}}'
  '{polynomial: {source: data sheet, phase: liquid, cp: [1880, 3.6], density: [881, -0.65], range: [20 °C, 300 °C]}}'
`
