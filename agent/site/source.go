package site

import (
	"slices"
	"strings"

	"heatreeve/thermo/unit"
)

var flows = []unit.Dimension{unit.MassFlow, unit.VolumeFlow, unit.MolarFlow}

// nowhere is the source of what could not be read; the fault is noted.
var nowhere = Source{Tag: -1}

// place is what may stand at a key of a load: tags and constants of some dimensions, and
// counters of others.
type place struct{ of, counted []unit.Dimension }

// theFlow is where the flow of a stream stands.
var theFlow = place{flows, []unit.Dimension{unit.Volume, unit.Mass, unit.Amount}}

// theWitness is where the witness of a load stands.
var theWitness = place{counted: []unit.Dimension{unit.Energy}}

func (p place) String() string {
	var says []string
	if len(p.of) > 0 {
		says = append(says, dimensions(p.of))
	}
	if len(p.counted) > 0 {
		says = append(says, "counter of "+dimensions(p.counted))
	}
	return strings.Join(says, ", or a ")
}

// takes tells whether the tag may stand at p.
func (p place) takes(t *Tag) bool {
	if t.Counter != nil {
		return slices.Contains(p.counted, t.Unit.Dimension)
	}
	return slices.Contains(p.of, t.Unit.Dimension)
}

// rate is the dimension of what a tag tells: of a counter, its rate.
func (t *Tag) rate() unit.Dimension {
	if t.Counter != nil {
		return rates[t.Unit.Dimension]
	}
	return t.Unit.Dimension
}

// needSource reads a tag or constant that must be there.
func (r *reader) needSource(o object, key, say string, allowed ...unit.Dimension) (Source, unit.Dimension) {
	v, ok := o.need(key, say)
	if !ok {
		return nowhere, 0
	}
	return r.source(v, allowed...)
}

// source is sourceAt for a place that takes no counter.
func (r *reader) source(v value, allowed ...unit.Dimension) (Source, unit.Dimension) {
	return r.sourceAt(v, place{of: allowed})
}

// sourceAt reads the name of a tag, or a quantity that stands in its stead, and its
// dimension, which of a counter is that of its rate. The dimension is 0 where there is a
// fault, here or at the tag.
func (r *reader) sourceAt(v value, p place) (Source, unit.Dimension) {
	s, ok := v.text()
	if !ok {
		return nowhere, 0
	}
	known := r.declared(p)
	i, declared := r.tags[s]
	switch {
	case declared:
		return r.tagSource(v, i, p)
	case len(p.of) > 0 && beginsNumber(s) && nearOf(s, known) == "":
		q, ok := v.quantity(p.of...)
		if !ok {
			return nowhere, 0
		}
		return Source{-1, r.constant(v, q.Unit.Dimension)}, q.Unit.Dimension
	case len(known) == 0:
		v.fault("tag %q is not declared, and neither is any tag of %v", clip(s), p)
	default:
		v.fault("tag %q is not declared%s; declared: %s", clip(s), nearOf(s, known), list(known))
	}
	return nowhere, 0
}

func (r *reader) tagSource(v value, i int, p place) (Source, unit.Dimension) {
	t := &r.site.Tags[i]
	switch {
	case t.Unit.Symbol == "":
		return Source{Tag: i}, 0
	case p.takes(t):
		return Source{Tag: i}, t.rate()
	}
	does, also := "is", ""
	if t.Counter != nil {
		does = "is a counter"
	} else if slices.Contains(p.counted, t.Unit.Dimension) {
		also = "; a tag that counts up says so with counts: {}"
	}
	if known := r.declared(p); len(known) > 0 {
		also += "; declared: " + list(known)
	}
	v.fault("tag %q %s in %v, %s; want a %v%s", t.Name, does, t.Unit, article(t.Unit.Dimension.String()), p, also)
	return Source{Tag: i}, 0
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

// declared lists the tags that may stand at p, in file order.
func (r *reader) declared(p place) []string {
	var names []string
	for i := range r.site.Tags {
		if t := &r.site.Tags[i]; p.takes(t) {
			names = append(names, t.Name)
		}
	}
	return names
}

// article puts "a" or "an" before a word.
func article(word string) string {
	if strings.ContainsRune("aeiou", rune(word[0])) {
		return "an " + word
	}
	return "a " + word
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
