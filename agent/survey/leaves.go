package survey

import (
	"bytes"
	"strconv"
	"strings"

	"github.com/go-json-experiment/json/jsontext"
)

const (
	// MostSeries is how many places of one topic's payloads are looked at.
	MostSeries = 1000
	// mostInAll is how many places of all topics are.
	mostInAll = 100_000
	// mostElements is how many elements of a list are looked at in one message.
	mostElements = 64
	// deepest is how deep in lists and objects is looked.
	deepest = 8
)

// each stands in a pointer for any element of a list.
const each = "*"

// leaves calls leaf with every value of a JSON text that is no object and no list, under
// its JSON Pointer (RFC 6901), in which the index of a list's element is [each] where
// the elements are objects. It reports whether the text is JSON throughout.
func leaves(payload []byte, leaf func(pointer string, kind jsontext.Kind, raw []byte)) bool {
	d := jsontext.NewDecoder(bytes.NewBuffer(payload))
	for depth := 0; ; {
		kind := d.PeekKind()
		switch kind {
		case '{', '[':
			if depth >= deepest {
				if err := d.SkipValue(); err != nil {
					return false
				}
				break
			}
			depth++
			if _, err := d.ReadToken(); err != nil {
				return false
			}
		case '}', ']':
			depth--
			if _, err := d.ReadToken(); err != nil {
				return false
			}
		default:
			value, err := d.ReadValue()
			if err != nil {
				return false
			}
			if isName(d, depth) {
				continue
			}
			if pointer, ok := where(d); ok {
				leaf(pointer, kind, value)
			}
		}
		if depth == 0 {
			return len(bytes.TrimSpace(payload[d.InputOffset():])) == 0
		}
	}
}

// isName tells whether what was read last is the name of a member.
func isName(d *jsontext.Decoder, depth int) bool {
	kind, n := d.StackIndex(depth)
	return kind == '{' && n%2 == 1
}

// where is the pointer of what was read last; not ok beyond the elements looked at.
func where(d *jsontext.Decoder) (pointer string, ok bool) {
	tokens := strings.Split(string(d.StackPointer()), "/")
	for level := 1; level < len(tokens); level++ {
		kind, _ := d.StackIndex(level)
		if kind != '[' {
			continue
		}
		i, err := strconv.Atoi(tokens[level])
		if err != nil || i >= mostElements {
			return "", false
		}
		if level+1 < len(tokens) {
			tokens[level] = each
		}
	}
	return strings.Join(tokens, "/"), true
}

// parent is the pointer of what holds the value at pointer.
func parent(pointer string) string {
	if i := strings.LastIndexByte(pointer, '/'); i >= 0 {
		return pointer[:i]
	}
	return ""
}

// key is the name of the value at pointer in what holds it.
func key(pointer string) string {
	name := pointer[strings.LastIndexByte(pointer, '/')+1:]
	return strings.ReplaceAll(strings.ReplaceAll(name, "~1", "/"), "~0", "~")
}

// whole stands for the list that is all of a message, as in a site file.
const whole = "whole"

// list splits a pointer into that of a list, "" where there is none, and that within each
// of its elements.
func list(pointer string) (samples, within string) {
	before, after, found := strings.Cut(pointer, "/"+each)
	switch {
	case !found:
		return "", pointer
	case before == "":
		return whole, after
	}
	return before, after
}
