package site

import (
	"heatreeve/thermo"
	"heatreeve/thermo/gas"
	"heatreeve/thermo/unit"
)

func species() []string { return gas.Species() }

// mixture reads a gas by volume, such as {N2: 71 %, O2: 29 %}.
func mixture(_ *reader, d declaration) thermo.Fluid {
	shares, ok := d.v.shares(species(), "shares by volume, such as N2: 79 %, O2: 21 %")
	if !ok {
		return nil
	}
	f, err := gas.New(shares, gas.Ideal)
	if err != nil {
		d.v.fault("%v", err)
		return nil
	}
	return f
}

// shares reads parts of a whole by name; want tells how to write them.
func (v value) shares(names []string, want string) (map[string]float64, bool) {
	o := v.objectOf(names)
	all := make(map[string]float64, len(o.has))
	for name, e := range o.has {
		if share, ok := e.within(0, 1, "0 % to 100 %", unit.Ratio); ok {
			all[name] = share
		}
	}
	if len(all) == 0 || len(all) < len(v.node.Content)/2 {
		v.emptyMapping(want)
		return nil, false
	}
	return all, true
}
