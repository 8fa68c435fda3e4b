package named

import (
	"fmt"
	"regexp"
	"slices"
	"strings"

	"heatreeve/thermo/unit/near"
)

// most names are guessed, for a part of a name or a slip of the keys.
const (
	most      = 5
	leastPart = 3 // letters of a name that are worth a guess
	shortName = 4 // letters of a name of which any two look alike
)

// Near lists the names that the unknown one may have been meant to be: those that the
// trade calls so, those of which it is a part, or those a few keystrokes away, nearest
// first. It is empty where there is none.
func (e *UnknownError) Near() []string {
	tail := strings.TrimSpace(strengths.FindString(e.Name))
	if t := trade(e.Name); t != nil {
		var all []string
		for _, n := range t.near {
			all = append(all, exampleOf(fold(n), tail))
		}
		return all
	}
	var all []string
	for _, key := range guesses(bare(e.Name)) {
		if n := exampleOf(key, tail); !slices.Contains(all, n) {
			all = append(all, n)
		}
	}
	return all[:min(most, len(all))]
}

// bare is the folded name without what may be a strength.
func bare(name string) string {
	return strings.Trim(fold(strengths.ReplaceAllString(name, " ")), ",;:()%")
}

// guesses are the keys of names of which bare is a part or, where there is none, of those
// a few keystrokes away. A number of a refrigerant is no guess at another.
func guesses(bare string) []string {
	var parts, spelled []string
	for _, key := range index().keys {
		if w := index().of(key); len(bare) >= leastPart && !w.aside && strings.Contains(key, bare) {
			parts = append(parts, key)
		}
		if !numbered.MatchString(key) {
			spelled = append(spelled, key)
		}
	}
	if len(parts) > 0 {
		return parts
	}
	slips := near.Names(bare, spelled)
	if len(bare) <= shortName {
		slips = slices.DeleteFunc(slips, func(key string) bool { return near.Distance(bare, key) > 1 || len(key) < leastPart })
	}
	return slips
}

var numbered = regexp.MustCompile(`^(liquid)?r\d`)

// exampleOf is the name of a key as it may be looked up, with the strength that was
// written if it goes with it.
func exampleOf(key, tail string) string {
	w := index().of(key)
	if strong, ok := index().strong[key]; ok && tail != "" {
		w = strong
		if _, err := w.withStrength(tail); err == nil {
			return fmt.Sprintf("%s %s", w.name, tail)
		}
	}
	return w.example()
}
