package survey

import (
	"fmt"
	"maps"
	"slices"
	"strings"
	"unicode/utf8"

	"heatreeve/ingest"
	"heatreeve/thermo/unit"
)

// Hurdle is what keeps numbers from being read as tags the way they are sent.
type Hurdle string

const (
	Spelled Hurdle = "number as text"               // in quotes, with its unit, or with a comma
	Parted  Hurdle = "list of elements with a name" // which may come in any order
	Nested  Hurdle = "list within a list"
)

// longestText is how much of a topic's text is shown, bytes.
const longestText = longestWord

// Hurdles tells of the numbers that no tag can read as they are sent, one text for each kind
// of them, with what to do.
func Hurdles(topics []Topic) []string {
	met, first := map[Hurdle]int{}, map[Hurdle]string{}
	for i := range topics {
		t := &topics[i]
		for _, h := range slices.Sorted(maps.Keys(t.Hurdles)) {
			if met[h]++; met[h] == 1 {
				first[h] = fmt.Sprintf("%s on %s", t.Hurdles[h], t.Name)
			}
		}
	}
	advice := map[Hurdle]string{
		Spelled: "a tag reads a bare number, or one in JSON without quotes; have them published so",
		Parted:  "a tag finds its value by the place in the message alone. Where their order never changes and none is ever left out, pointers with 0, 1 and so on for the * read them; otherwise have each published by itself, or as members of one object",
		Nested:  "a tag reads one list of a message; have them published in one",
	}
	var all []string
	for _, h := range []Hurdle{Spelled, Parted, Nested} {
		if n := met[h]; n > 0 {
			all = append(all, fmt.Sprintf("%s: %s (topics: %d): %s", h, first[h], n, advice[h]))
		}
	}
	return all
}

// spelled tells whether a text is a number that a person would understand, and a tag not:
// one in quotes, with a decimal comma, or with its unit.
func spelled(text string) bool {
	text = strings.TrimSpace(text)
	end := strings.LastIndexAny(text, "0123456789") + 1
	for ; end > 0; end = strings.LastIndexAny(text[:end-1], "0123456789") + 1 { // "8.5 m3/h" ends in its unit, in which a digit may stand
		if _, ok := ingest.Number([]byte(strings.Replace(text[:end], ",", ".", 1))); !ok {
			continue
		}
		rest := strings.TrimSpace(text[end:])
		if rest == "" {
			return true
		}
		_, err := unit.LookupAs(rest, tells...)
		return err == nil
	}
	return false
}

// hurdles are those of a topic, each with an example.
func (t *topic) hurdles() map[Hurdle]string {
	all := map[Hurdle]string{}
	add := func(h Hurdle, example string) {
		if _, there := all[h]; !there {
			all[h] = example
		}
	}
	if t.shape == Words && spelled(t.text) {
		add(Spelled, fmt.Sprintf("%q", t.text))
	}
	for _, pointer := range slices.Sorted(maps.Keys(t.series)) {
		s := t.series[pointer]
		switch {
		case t.plug:
		case s.numbers == 0 && len(s.words) > 0 && !s.timed() && !named(pointer, otherWords) && !named(pointer, qualityWords) && !slices.ContainsFunc(s.words, func(w string) bool { return !spelled(w) }):
			add(Spelled, fmt.Sprintf("%q at %s", s.words[0], pointer))
		case !t.measures(pointer):
		case strings.Count(pointer, "/"+each) > 1:
			add(Nested, pointer)
		default:
			if by, ok := t.namedBy(pointer); ok {
				add(Parted, fmt.Sprintf("%s, named by %s", pointer, key(by)))
			}
		}
	}
	return all
}

// nameWords are members that name the element of a list.
var nameWords = []string{"id", "name", "tag", "tagname", "key", "point", "pointid", "node", "nodeid", "sensor", "channel", "signal", "variable", "item", "n", "label"}

// namedBy is where the elements of the list that pointer leads into have names of their own,
// and different ones.
func (t *topic) namedBy(pointer string) (by string, ok bool) {
	if !strings.Contains(pointer, "/"+each) {
		return "", false
	}
	return t.beside(pointer, func(p string, s *series) bool { return named(p, nameWords) && len(s.words) > 1 })
}

// sample is the beginning of a text, in whole characters.
func sample(text []byte) string {
	text = text[:min(len(text), longestText)]
	for len(text) > 0 && !utf8.Valid(text) {
		text = text[:len(text)-1]
	}
	return string(text)
}
