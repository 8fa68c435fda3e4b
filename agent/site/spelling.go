package site

import (
	"slices"
	"strings"

	"heatreeve/thermo/roster"
)

// spelled is the entry under the key that it spells in its own way, or as it is.
func (e entry) spelled(allowed, names []string) entry {
	if slices.Contains(allowed, e.name) {
		return e
	}
	if name, ok := alike(e.name, names); ok {
		path := strings.TrimSuffix(e.key.path, join("", e.name)) + join("", name)
		e.name, e.key.path, e.value.path = name, path, path
	}
	return e
}

// alike finds the one of names that differs from name in case, spaces and hyphens only.
func alike(name string, names []string) (string, bool) {
	sought := roster.Fold(name)
	i := slices.IndexFunc(names, func(n string) bool { return roster.Fold(n) == sought })
	if i < 0 {
		return "", false
	}
	return names[i], true
}

// oneOfNames is oneOf for names, in any case, with spaces or hyphens.
func (v value) oneOfNames(names ...string) (string, bool) {
	if name, ok := alike(v.node.Value, names); ok && v.node.ShortTag() == "!!str" {
		return name, true
	}
	return v.oneOf(names...)
}
