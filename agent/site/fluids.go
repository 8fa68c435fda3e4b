package site

import (
	"maps"
	"slices"
	"sync"

	"go.yaml.in/yaml/v3"

	"heatreeve/thermo"
	"heatreeve/thermo/aqueous"
	"heatreeve/thermo/gas"
	"heatreeve/thermo/unit"
	"heatreeve/thermo/water"
)

// builtIn are the fluids that need no declaration.
var builtIn = sync.OnceValue(func() map[string]thermo.Fluid {
	return map[string]thermo.Fluid{
		"water":   water.Liquid(),
		"steam":   water.Steam(),
		"dry air": gas.DryAir(),
	}
})

func species() []string { return gas.Species() }

// fluidKinds are the keys of which a declared fluid has one.
func fluidKinds() []string { return append(aqueous.Solutes(), "gas", "table") }

func fluidKeys() []string { return append(fluidKinds(), "uncertainty") }

// readFluids reads the declared fluids, right or wrong, beside the built-in ones.
func (r *reader) readFluids(o object) {
	r.site.Fluids, r.fluids = maps.Clone(builtIn()), maps.Clone(builtIn())
	v, ok := o.get("fluids")
	if !ok {
		return
	}
	for _, e := range v.entries() {
		e.key.label(e.name)
		if _, taken := builtIn()[e.name]; taken {
			e.key.fault("is built in; choose another name for a fluid of your own")
			continue
		}
		f := r.declare(e)
		r.fluids[e.name] = f
		if f != nil {
			r.site.Fluids[e.name] = f
		}
	}
}

// fluid finds the fluid that a load names.
func (r *reader) fluid(v value) (string, thermo.Fluid) {
	s, ok := v.text()
	if !ok {
		return "", nil
	}
	f, ok := r.fluids[s]
	if !ok {
		known := slices.Sorted(maps.Keys(r.fluids))
		v.fault("fluid %q is not known%s; known: %s", clip(s), nearOf(s, known), list(known))
	}
	return s, f
}

// declare builds a fluid, or returns nil where there is a fault.
func (r *reader) declare(e entry) thermo.Fluid {
	o := e.objectOf(fluidKeys())
	var kind string
	for _, k := range fluidKinds() {
		v, ok := o.get(k)
		switch {
		case ok && kind != "":
			v.fault("stands beside %q; a fluid is one or the other", kind)
			return nil
		case ok:
			kind = k
		}
	}
	if v, ok := o.get("uncertainty"); ok && (kind == "gas" || kind == "table") {
		v.fault("is that of a solution's strength; a table has its own within it, a gas has none")
	}
	switch kind {
	case "":
		if e.node.Kind == yaml.MappingNode && len(o.has) == len(e.node.Content)/2 {
			o.fault("says not what the fluid is; want one of: %s", list(fluidKinds()))
		}
		return nil
	case "gas":
		return mixture(o.has[kind].value)
	case "table":
		return r.tabled(e.name, o.has[kind].value)
	}
	return solution(kind, o)
}

// solution is a glycol in water by mass, such as {propylene glycol: 32 %}.
// The uncertainty is the standard uncertainty of the strength, in the same
// percent; without one the strength is taken as exact.
func solution(solute string, o object) thermo.Fluid {
	strength := o.has[solute].value
	x, ok := strength.quantity(unit.Ratio)
	if !ok {
		return nil
	}
	var u float64
	if v, given := o.get("uncertainty"); given {
		if u, ok = v.within(0, 0.1, "0 % to 10 %", unit.Ratio); !ok {
			return nil
		}
	}
	f, err := aqueous.New(solute, x.SI(), u)
	if err != nil {
		strength.fault("%v", err)
		return nil
	}
	return f
}

// mixture is a gas by volume, such as {N2: 71 %, O2: 29 %}.
func mixture(v value) thermo.Fluid {
	o := v.objectOf(species())
	shares := make(map[string]float64, len(o.has))
	for formula, e := range o.has {
		share, ok := e.within(0, 1, "0 % to 100 %", unit.Ratio)
		if !ok {
			return nil
		}
		shares[formula] = share
	}
	if len(shares) == 0 || len(shares) < len(v.node.Content)/2 {
		v.emptyMapping("shares by volume, such as N2: 79 %, O2: 21 %")
		return nil
	}
	f, err := gas.New(shares)
	if err != nil {
		v.fault("%v", err)
		return nil
	}
	return f
}
