package site

import (
	"slices"
	"strings"

	"heatreeve/thermo/unit"
)

var flows = []unit.Dimension{unit.MassFlow, unit.VolumeFlow, unit.MolarFlow}

// nowhere is the source of what could not be read; the fault is noted.
var nowhere = Source{Tag: -1}

// needSource reads a tag or constant that must be there.
func (r *reader) needSource(o object, key, say string, allowed ...unit.Dimension) (Source, unit.Dimension) {
	v, ok := o.need(key, say)
	if !ok {
		return nowhere, 0
	}
	return r.source(v, allowed...)
}

// source reads the name of a tag, or a quantity that stands in its stead, and its
// dimension. The dimension is 0 where there is a fault, here or at the tag.
func (r *reader) source(v value, allowed ...unit.Dimension) (Source, unit.Dimension) {
	s, ok := v.text()
	if !ok {
		return nowhere, 0
	}
	i, declared := r.tags[s]
	switch {
	case declared:
		return r.tagSource(v, i, allowed)
	case beginsNumber(s) && nearOf(s, r.declared(allowed)) == "":
		q, ok := v.quantity(allowed...)
		if !ok {
			return nowhere, 0
		}
		return Source{-1, r.constant(v, q.Unit.Dimension)}, q.Unit.Dimension
	}
	known := r.declared(allowed)
	if len(known) == 0 {
		v.fault("tag %q is not declared, and neither is any tag of %s", clip(s), dimensions(allowed))
		return nowhere, 0
	}
	v.fault("tag %q is not declared%s; declared: %s", clip(s), nearOf(s, known), list(known))
	return nowhere, 0
}

func (r *reader) tagSource(v value, i int, allowed []unit.Dimension) (Source, unit.Dimension) {
	t := r.site.Tags[i]
	switch {
	case t.Unit.Symbol == "":
		return Source{Tag: i}, 0
	case !slices.Contains(allowed, t.Unit.Dimension):
		msg := "tag %q is in %v, a %v; want a %s"
		if known := r.declared(allowed); len(known) > 0 {
			msg += "; declared: " + strings.ReplaceAll(list(known), "%", "%%")
		}
		v.fault(msg, t.Name, t.Unit, t.Unit.Dimension, dimensions(allowed))
		return Source{Tag: i}, 0
	}
	return Source{Tag: i}, t.Unit.Dimension
}

// constant reads a quantity above zero, a pressure as absolute; a ratio may be zero, as dry
// air has it. It is 0 where there is a fault.
func (r *reader) constant(v value, d unit.Dimension) float64 {
	q, ok := v.quantity(d)
	if !ok {
		return 0
	}
	si := unit.Decimal(r.absolute(q))
	if si < 0 || si == 0 && d != unit.Ratio {
		floor := "not above zero"
		switch d {
		case unit.Pressure:
			floor = "not above vacuum"
		case unit.Ratio:
			floor = "below zero"
		}
		v.fault("%v is %s", q, floor)
		return 0
	}
	return si
}

// declared lists the tags of some dimensions in file order.
func (r *reader) declared(ds []unit.Dimension) []string {
	var names []string
	for _, t := range r.site.Tags {
		if slices.Contains(ds, t.Unit.Dimension) {
			names = append(names, t.Name)
		}
	}
	return names
}

func dimensions(ds []unit.Dimension) string {
	names := make([]string, len(ds))
	for i, d := range ds {
		names[i] = d.String()
	}
	return strings.Join(names, " or ")
}

func beginsNumber(s string) bool {
	s = strings.TrimSpace(s)
	return strings.HasPrefix(s, "−") || s != "" && strings.ContainsRune("+-.0123456789", rune(s[0]))
}
