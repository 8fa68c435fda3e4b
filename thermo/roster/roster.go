// Package roster finds an entry of a short list by the name that a person writes: in any
// case, with spaces, hyphens or neither.
package roster

import (
	"fmt"
	"slices"
	"strings"
	"unicode"

	"heatreeve/thermo/unit/near"
)

// longest name that is quoted back in full, in letters.
const longest = 60

// Find returns the place among names of the one that name stands for. also leads from other
// names to one of names. what says in the error of an unknown name what was sought, such as
// "solid"; the error tells the near names and all of them.
func Find(what, name string, names []string, also map[string]string) (int, error) {
	sought := Fold(name)
	known := make(map[string]string, len(names)+len(also))
	for other, n := range also {
		known[Fold(other)] = n
	}
	for _, n := range names {
		known[Fold(n)] = n
	}
	if n, ok := known[sought]; ok {
		if k := slices.Index(names, n); k >= 0 {
			return k, nil
		}
	}
	return 0, fmt.Errorf("unknown %s %q%s; known: %s", what, clip(name), hint(sought, known, names), strings.Join(names, ", "))
}

// leastPart is what a part of a name has at least, in bytes, to stand for it.
const leastPart = 4

// hint names those of names of which the folded name is a part, such as "glycol", or else
// those that it is near, in their own order.
func hint(sought string, known map[string]string, names []string) string {
	var folded []string
	meant := make(map[string]bool)
	for f, n := range known {
		folded = append(folded, f)
		if len(sought) >= leastPart && strings.Contains(f, sought) {
			meant[n] = true
		}
	}
	if len(meant) == 0 {
		for _, f := range near.Names(sought, folded) {
			meant[known[f]] = true
		}
	}
	var guess []string
	for _, n := range names {
		if meant[n] {
			guess = append(guess, fmt.Sprintf("%q", n))
		}
	}
	if len(guess) == 0 {
		return ""
	}
	return ", did you mean " + strings.Join(guess, " or ")
}

// Fold keeps what tells two names apart: no case, spaces, hyphens or underscores.
func Fold(name string) string {
	return strings.Map(func(r rune) rune {
		if unicode.IsSpace(r) || unicode.Is(unicode.Pd, r) || r == '_' {
			return -1
		}
		return unicode.ToLower(r)
	}, name)
}

func clip(s string) string {
	if rs := []rune(s); len(rs) > longest {
		return string(rs[:longest]) + "..."
	}
	return s
}
