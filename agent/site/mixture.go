package site

import (
	"go.yaml.in/yaml/v3"

	"heatreeve/thermo"
	"heatreeve/thermo/gas"
)

// species are the gases of a mixture by formula, and dry air.
func species() []string { return append(gas.Species(), "dry air") }

// mixture reads a gas by its shares, such as {N2: 71 %, O2: 29 %}. They are by volume,
// which is by mole, unless by says that they are by mass; model says how the
// properties are found, the best way for the gas and the state unless given.
func mixture(_ *reader, d declaration) thermo.Fluid {
	isMass, okBy := d.o.isMass()
	read := byVolume(", or beside it by: mass")
	if isMass || !okBy {
		read = byMass
	}
	shares, ok := d.v.shares(species(), "shares by volume, such as {N2: 79 %, O2: 21 %}", read)
	model, okModel := d.o.model()
	if !ok || !okBy || !okModel {
		return nil
	}
	var err error
	if isMass {
		shares, err = gas.MoleFractions(shares)
	}
	var f thermo.Fluid
	if err == nil {
		f, err = gas.New(shares, model)
	}
	return d.v.made(by(model, f, err))
}

func (o object) isMass() (is, ok bool) {
	v, given := o.get("by")
	if !given {
		return false, true
	}
	by, ok := v.oneOf("volume", "mole", "mass")
	return by == "mass", ok
}

func (o object) model() (gas.Model, bool) {
	v, given := o.get("model")
	if !given {
		return gas.Best, true
	}
	s, ok := v.oneOfNames(gas.Models()...)
	if !ok {
		return gas.Best, false
	}
	m, err := gas.ParseModel(s)
	if err != nil {
		v.fault("%v", err)
	}
	return m, err == nil
}

// shares reads parts of a whole by name; want tells how to write them.
func (v value) shares(names []string, want string, read basis) (map[string]float64, bool) {
	if v.node.Kind != yaml.MappingNode {
		v.fault("want %s, found %s", want, v.kind())
		return nil, false
	}
	o := v.objectOf(names, names)
	all := make(map[string]float64, len(o.has))
	for name, e := range o.has {
		if share, ok := read(e.value, 0, 1, "0 % to 100 %"); ok {
			all[name] = share
		}
	}
	if len(all) == 0 || len(all) < len(v.node.Content)/2 {
		v.emptyMapping(want)
		return nil, false
	}
	return all, true
}
