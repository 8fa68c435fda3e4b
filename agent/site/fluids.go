package site

import (
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"
	"sync"

	"go.yaml.in/yaml/v3"

	"heatreeve/thermo"
	"heatreeve/thermo/aqueous"
	"heatreeve/thermo/named"
	"heatreeve/thermo/unit/near"
)

// kind is one way to declare a fluid: a key, and those that may stand beside it.
type kind struct {
	key    string
	beside []string
	// read makes the fluid of what stands under the key, or returns nil where
	// there is a fault.
	read func(r *reader, d declaration) thermo.Fluid
}

// declaration is a fluid of the file: v stands under the key of its kind, and
// beside it the rest of o.
type declaration struct {
	name string
	v    value
	o    object
}

var kinds = sync.OnceValue(func() []kind {
	var ks []kind
	for _, solute := range aqueous.Solutes() {
		ks = append(ks, kind{solute, []string{"uncertainty", "by"}, solution(solute)})
	}
	return append(ks,
		kind{"seawater", nil, saltWater},
		kind{"gas", []string{"by", "model"}, mixture},
		kind{"flue gas", []string{"model"}, flueGas},
		kind{"moist air", nil, moistAir},
		kind{"food", nil, foodstuff},
		kind{"petroleum", nil, petroleum},
		kind{"table", nil, tabled},
		kind{"polynomial", nil, polynomial},
	)
})

func fluidKinds() []string {
	var names []string
	for _, k := range kinds() {
		names = append(names, k.key)
	}
	return names
}

// fluidKeys are all the keys of a declaration, each once.
func fluidKeys() []string {
	names := fluidKinds()
	for _, k := range kinds() {
		for _, key := range k.beside {
			if !slices.Contains(names, key) {
				names = append(names, key)
			}
		}
	}
	return names
}

// readFluids reads the declared fluids, right or wrong.
func (r *reader) readFluids(o object) {
	r.site.Fluids, r.fluids = make(map[string]thermo.Fluid), make(map[string]thermo.Fluid)
	v, ok := o.get("fluids")
	if !ok {
		return
	}
	for _, e := range v.entries() {
		e.key.label(e.name)
		if named.Listed(e.name) {
			e.key.fault("is built in; choose another name for a fluid of your own")
			continue
		}
		if other, twice := alike(e.name, slices.Sorted(maps.Keys(r.fluids))); twice {
			e.key.fault("differs from %q in its spelling only; choose another name", other)
			continue
		}
		f := r.declare(e.name, e.value)
		r.fluids[e.name] = f
		if f != nil {
			r.site.Fluids[e.name] = f
		}
	}
}

// fluid finds the fluid that a load names, in any spelling: one of the file, or one that is
// built in, which goes by its usual name.
func (r *reader) fluid(v value) (string, thermo.Fluid) {
	if v.node.Kind == yaml.MappingNode {
		v.fault("want the name of a fluid, found a mapping; declare it under fluids, and name it here")
		return "", nil
	}
	s, ok := v.text()
	if !ok {
		return "", nil
	}
	if name, declared := alike(s, slices.Sorted(maps.Keys(r.fluids))); declared {
		return name, r.fluids[name]
	}
	f, err := named.Lookup(s)
	var unknown *named.UnknownError
	switch {
	case err == nil:
		return f.Name(), f
	case errors.As(err, &unknown):
		v.fault("%s", r.instead(unknown))
	default:
		v.fault("%v", err)
	}
	return s, nil
}

// instead tells the fluids that there are, those first that the unknown name may have
// meant.
func (r *reader) instead(unknown *named.UnknownError) string {
	declared := slices.Sorted(maps.Keys(r.fluids))
	say := unknown.Hint()
	if guess := near.Names(unknown.Name, declared); len(guess) > 0 {
		say = fmt.Sprintf("fluid %q is not known; near: %s", clip(unknown.Name), list(append(guess, unknown.Near()...)))
	}
	if len(declared) > 0 {
		say += "; declared: " + list(declared)
	}
	return say + "; built in: " + strings.Join(named.Names(), ", ")
}

// declare builds a fluid, or returns nil where there is a fault.
func (r *reader) declare(name string, v value) thermo.Fluid {
	if r.namedAsKey(v) {
		return nil
	}
	o := v.objectOf(fluidKeys(), fluidKinds())
	var found []kind
	for _, k := range kinds() {
		if _, ok := o.get(k.key); ok {
			found = append(found, k)
		}
	}
	switch {
	case len(found) > 1:
		o.has[found[1].key].fault("stands beside %q; a fluid is one or the other", found[0].key)
		return nil
	case len(found) == 0:
		if v.node.Kind == yaml.MappingNode && len(o.has) == len(v.node.Content)/2 {
			o.fault("says not what the fluid is; want one of: %s", strings.Join(fluidKinds(), ", "))
		}
		return nil
	}
	k := found[0]
	for key, e := range o.has {
		if key != k.key && !slices.Contains(k.beside, key) {
			e.key.fault("goes not with %s; it goes with: %s", k.key, strings.Join(goesWith(key), ", "))
		}
	}
	return k.read(r, declaration{name, o.has[k.key].value, o})
}

// namedAsKey notes the fault of a declaration that has a name in the place of its kind,
// such as {water: } or {glycol: 30 %}.
func (r *reader) namedAsKey(v value) bool {
	if v.node.Kind != yaml.MappingNode || len(v.node.Content) == 0 {
		return false
	}
	if _, ok := alike(v.node.Content[0].Value, fluidKeys()); ok {
		return false
	}
	key := value{v.scope, v.node.Content[0], join(v.path, v.node.Content[0].Value)}
	name := key.node.Value
	f, err := named.Lookup(name)
	var unknown *named.UnknownError
	switch {
	case err == nil:
		key.fault("%q is the name of a fluid, %s, and needs no declaration: write it without braces", clip(name), f.Name())
		return true
	case errors.As(err, &unknown) && unknown.Advice() != "":
		key.fault("%s", unknown.Hint())
		return true
	}
	return false
}

// goesWith lists the kinds beside which a key may stand.
func goesWith(key string) []string {
	var names []string
	for _, k := range kinds() {
		if slices.Contains(k.beside, key) {
			names = append(names, k.key)
		}
	}
	return names
}
