package main

import (
	"fmt"
	"io"

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
	t := newColumns(0)
	t.line("fluid", "phase", "range, absolute pressure", "source")
	for _, e := range entries {
		of := ""
		if e.Form != e.Example {
			of = " (" + e.Example + ")"
		}
		t.line(e.Form, e.Phase.String(), e.Range+of, e.Source)
	}
	fmt.Fprint(w, t)
	_, err := fmt.Fprint(w, ownFluids)
	return err
}

const ownFluids = `
Letter case, spaces and hyphens make no difference. Any other fluid is written as in the fluids of a site file:
  '{gas: {N2: 79 %, O2: 21 %}}'
  '{table: {source: data sheet, phase: liquid, points: [[20 °C, 1.9 kJ/(kg K), 868 kg/m3], [200 °C, 2.5 kJ/(kg K), 751 kg/m3]]}}'
`
