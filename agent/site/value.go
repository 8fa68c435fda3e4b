package site

import (
	"fmt"
	"slices"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"go.yaml.in/yaml/v3"

	"heatreeve/thermo/unit/near"
)

// scope gathers the faults of one file.
type scope struct {
	file   string
	faults Faults
}

func (s *scope) add(line, column int, path, format string, args ...any) {
	s.faults = append(s.faults, Fault{s.file, max(1, line), max(1, column), path, fmt.Sprintf(format, args...)})
}

// value is a node of the file with its path.
type value struct {
	*scope
	node *yaml.Node
	path string
}

func (v value) fault(format string, args ...any) {
	v.add(v.node.Line, v.node.Column, v.path, format, args...)
}

// entry is one key of a mapping: its place, and the value under it.
type entry struct {
	name string
	key  value
	value
}

// entries lists the keys of a mapping in file order. A key that stands twice is
// a fault and keeps its first value.
func (v value) entries() []entry {
	if v.node.Kind != yaml.MappingNode {
		v.fault("want a mapping of keys, found %s", v.kind())
		return nil
	}
	seen := make(map[string]int, len(v.node.Content)/2)
	es := make([]entry, 0, len(v.node.Content)/2)
	for i := 0; i+1 < len(v.node.Content); i += 2 {
		k, node := v.node.Content[i], v.node.Content[i+1]
		key := value{v.scope, k, v.path}
		if k.Kind != yaml.ScalarNode || k.ShortTag() == "!!null" || k.ShortTag() == "!!merge" {
			key.fault("want a name as a key, found %s", key.kind())
			continue
		}
		key.path = join(v.path, k.Value)
		if line, twice := seen[k.Value]; twice {
			key.fault("stands twice; first in line %d", line)
			continue
		}
		seen[k.Value] = k.Line
		es = append(es, entry{k.Value, key, value{v.scope, node, key.path}})
	}
	return es
}

// object is a mapping whose keys are fixed.
type object struct {
	value
	has   map[string]entry
	meant []string // keys that unknown ones were probably to be
}

// object reads v as the block of that name; see [Keys]. An unknown key is a
// fault.
func (v value) object(block string) object {
	return v.objectOf(keys[block], nil)
}

// objectOf reads v with the keys that are allowed. Those of names are names of substances and
// the like, and are found in any case, with spaces or hyphens.
func (v value) objectOf(allowed, names []string) object {
	o := object{value: v, has: make(map[string]entry)}
	for _, e := range v.entries() {
		e = e.spelled(allowed, names)
		if first, twice := o.has[e.name]; twice {
			e.key.fault("stands twice; first in line %d, as %q", first.key.node.Line, first.key.node.Value)
			continue
		}
		if !slices.Contains(allowed, e.name) {
			guess := meant(e.name, allowed)
			o.meant = append(o.meant, guess...)
			e.key.fault("unknown key %q%s; allowed: %s", clip(e.name), hint(guess), strings.Join(allowed, ", "))
			continue
		}
		o.has[e.name] = e
	}
	return o
}

func (o object) get(key string) (value, bool) {
	e, ok := o.has[key]
	return e.value, ok
}

// need is get for a key that must be there, or one of the others in its stead; say tells
// how to write it. What an unknown key was probably to be is not told to be missing.
func (o object) need(key, say string, others ...string) (value, bool) {
	v, ok := o.get(key)
	if !ok && !o.misspelt(append(others, key)) && o.node.Kind == yaml.MappingNode {
		value{o.scope, o.node, join(o.path, key)}.fault("is missing; %s", say)
	}
	return v, ok
}

// misspelt tells whether an unknown key was probably to be one of these.
func (o object) misspelt(keys []string) bool {
	return slices.ContainsFunc(keys, func(k string) bool { return slices.Contains(o.meant, k) })
}

// items lists the values of a sequence.
func (v value) items() []value {
	if v.node.Kind != yaml.SequenceNode {
		v.fault("want a list, found %s", v.kind())
		return nil
	}
	vs := make([]value, len(v.node.Content))
	for i, n := range v.node.Content {
		vs[i] = value{v.scope, n, fmt.Sprintf("%s[%d]", v.path, i)}
	}
	return vs
}

// text reads a scalar that YAML takes as text. The value is not quoted back
// where it is something else: it may be a secret in the wrong place.
func (v value) text() (string, bool) {
	switch {
	case v.node.Kind != yaml.ScalarNode || v.node.ShortTag() != "!!str":
		hint := ""
		if v.node.Kind == yaml.ScalarNode && v.node.ShortTag() != "!!null" {
			hint = "; a name is put in quotes, a quantity has a unit"
		}
		v.fault("want text, found %s%s", v.kind(), hint)
		return "", false
	case strings.TrimSpace(v.node.Value) == "":
		v.fault("is empty")
		return "", false
	}
	return v.node.Value, true
}

// oneOf reads a word out of a fixed set.
func (v value) oneOf(words ...string) (string, bool) {
	s, ok := v.text()
	if ok && !slices.Contains(words, s) {
		v.fault("%q is not known%s; allowed: %s", clip(s), nearOf(s, words), strings.Join(words, ", "))
		return "", false
	}
	return s, ok
}

func (v value) kind() string {
	switch v.node.Kind {
	case yaml.MappingNode:
		return "a mapping"
	case yaml.SequenceNode:
		return "a list"
	case yaml.AliasNode:
		return "an alias, which is not followed; write the value out"
	}
	switch v.node.ShortTag() {
	case "!!str":
		return "text"
	case "!!int", "!!float":
		return "a bare number"
	case "!!bool":
		return "true or false"
	case "!!null":
		return "nothing"
	case "!!timestamp":
		return "a date"
	case "!!merge":
		return "a merge key, which is not followed; write the values out"
	}
	return "a value of the type " + clip(strconv.Quote(v.node.Tag))
}

// maxLabel is the longest name of a tag, load or fluid, in bytes: metric stores
// carry it with every sample.
const maxLabel = 64

// label checks a name that will be a metric label.
func (v value) label(name string) bool {
	switch {
	case strings.TrimSpace(name) == "":
		v.fault("the name is empty")
	case len(name) > maxLabel:
		v.fault("the name is %d bytes long; at most %d", len(name), maxLabel)
	case !utf8.ValidString(name):
		v.fault("the name is not valid UTF-8")
	case strings.TrimSpace(name) != name:
		v.fault("the name %q begins or ends with a space", name)
	case strings.ContainsFunc(name, unprintable):
		v.fault("the name %q has a character that cannot be printed", name)
	default:
		return true
	}
	return false
}

func unprintable(r rune) bool { return !unicode.IsPrint(r) || r == utf8.RuneError }

// join extends a path, quoting a name that is no plain word.
func join(path, name string) string {
	plain := func(r rune) bool {
		return r == '-' || r == '_' || unicode.IsLetter(r) || unicode.IsDigit(r)
	}
	if name == "" || strings.ContainsFunc(name, func(r rune) bool { return !plain(r) }) {
		name = strconv.Quote(clip(name))
	}
	if path == "" {
		return name
	}
	return path + "." + name
}

// nearOf is the hint at the names that may have been meant, or "".
func nearOf(name string, known []string) string { return hint(near.Names(name, known)) }

// hint tells names that may have been meant, or is "".
func hint(names []string) string {
	if len(names) == 0 {
		return ""
	}
	return "; near: " + list(names[:min(3, len(names))])
}

// list quotes names for a message, the first few of many.
func list(names []string) string {
	const most = 8
	var qs []string
	for _, n := range names[:min(most, len(names))] {
		qs = append(qs, strconv.Quote(n))
	}
	if more := len(names) - most; more > 0 {
		qs = append(qs, fmt.Sprintf("and %d more", more))
	}
	return strings.Join(qs, ", ")
}

// clip keeps what is quoted back to a line's length.
func clip(s string) string {
	const most = 80
	if utf8.RuneCountInString(s) <= most {
		return s
	}
	return string([]rune(s)[:most]) + "..."
}
