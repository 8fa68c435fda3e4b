package named

import (
	"cmp"
	"fmt"
	"regexp"
	"slices"
	"strings"
	"unicode"
	"unicode/utf8"

	"heatreeve/thermo/unit/near"
)

// most names are guessed, for a part of a name or a slip of the keys.
const (
	most        = 5
	mostSpelled = 2
	leastPart   = 3 // letters of a name that are worth a guess
	shortName   = 4 // letters of a name of which any two look alike
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
	for _, key := range guesses(bare(e.Name)) { // another name of the same is shown by its own
		if n := exampleOf(key, tail); !slices.Contains(all, n) {
			all = append(all, n)
		}
	}
	return all[:min(most, len(all))]
}

// Nearest lists the names, two at most, that have a word of the unknown one or, where there
// is none, whose spelling differs in the least part of its letters. They need not have to
// do with what was meant.
func (e *UnknownError) Nearest() []string {
	sought := clip(strengths.ReplaceAllString(e.Name, " "))
	key := bare(sought)
	if key == "" {
		return nil
	}
	tail := strings.TrimSpace(strengths.FindString(e.Name))
	var candidates []candidate
	for _, w := range words() {
		if w.dimension != 0 && tail == "" && index().plain[fold(w.name)] != nil {
			continue // the plain one is told
		}
		c := candidate{w.name, 0, apart(key, fold(w.name))}
		for _, name := range append([]string{w.name}, w.also...) {
			c.shared = max(c.shared, shared(sought, name))
		}
		if c.shared > 0 || c.apart < 1 {
			candidates = append(candidates, c)
		}
	}
	slices.SortStableFunc(candidates, func(a, b candidate) int {
		return cmp.Or(cmp.Compare(b.shared, a.shared), cmp.Compare(a.apart, b.apart))
	})
	var all []string
	for _, c := range candidates {
		if n := exampleOf(fold(c.name), tail); len(all) < mostSpelled && !slices.Contains(all, n) {
			all = append(all, n)
		}
	}
	return all
}

// candidate is a name with how many letters of whole words the fluid's names share with the
// one that is sought, and which part of the letters differs.
type candidate struct {
	name   string
	shared int
	apart  float64
}

// shared counts the letters of the words that stand in both names.
func shared(a, b string) (letters int) {
	others := strings.FieldsFunc(b, parted)
	for i := range others {
		others[i] = fold(others[i])
	}
	for _, word := range strings.FieldsFunc(a, parted) {
		if w := fold(word); len(w) >= leastPart && slices.Contains(others, w) {
			letters += len(w)
		}
	}
	return letters
}

func parted(r rune) bool { return !unicode.IsLetter(r) && !unicode.IsDigit(r) }

// apart is the part of the letters in which two folded names differ, 0 to 1.
func apart(a, b string) float64 {
	return float64(near.Distance(a, b)) / float64(max(utf8.RuneCountInString(a), utf8.RuneCountInString(b)))
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
	key = index().listed(key)
	w := index().of(key)
	if strong, ok := index().strong[key]; ok && tail != "" {
		w = strong
		if _, err := w.withStrength(tail); err == nil {
			return fmt.Sprintf("%s %s", w.name, tail)
		}
	}
	return w.example()
}
