// Package named finds a fluid by the name that an engineer writes: "water",
// "CO2", "propylene glycol 32 %", "seawater 35 g/kg".
//
// Letter case, spaces and hyphens make no difference. A name that wants a
// strength is followed by one with its unit: "%", "‰" and "g/kg" are by mass,
// "vol %" is by volume. [List] tells every name with its range and source.
package named

import (
	"fmt"
	"regexp"
	"slices"
	"strings"
	"unicode"

	"heatreeve/thermo"
	"heatreeve/thermo/unit"
	"heatreeve/thermo/unit/near"
)

// Lookup returns the fluid of that name. The error of an unknown name is an
// *[UnknownError]; that of a name without its strength, or with a wrong one, says how
// it is written.
func Lookup(name string) (thermo.Fluid, error) {
	f, err := lookup(name)
	if _, unknown := err.(*UnknownError); !unknown {
		return f, err
	}
	for _, find := range otherwise {
		if f, err := find(strings.TrimSpace(name)); err == nil {
			return f, nil
		}
	}
	return nil, err
}

// Listed tells whether the name is one of [List], with its strength where it wants one.
func Listed(name string) bool {
	_, err := lookup(name)
	return err == nil
}

// lookup is Lookup among the names of the list.
func lookup(name string) (thermo.Fluid, error) {
	if w, ok := index().plain[fold(name)]; ok {
		return w.make(strength{})
	}
	for i, r := range name {
		if !unicode.IsDigit(r) && !isSign(r, name[:i]) {
			continue
		}
		head, tail := fold(name[:i]), name[i:]
		if w, ok := index().strong[head]; ok {
			return w.withStrength(tail)
		}
		if w, ok := index().plain[head]; ok && beginsStrength(tail) {
			return nil, fmt.Errorf("%s stands for one fluid and takes no strength, found %q", w.name, clip(strings.TrimSpace(tail)))
		}
	}
	if w, ok := index().strong[fold(name)]; ok {
		return nil, fmt.Errorf("%s wants its %s as well: write %q%s", w.name, w.asks(), w.example(), w.hint())
	}
	return nil, &UnknownError{name}
}

// UnknownError says that no fluid has the name, with the near ones and all.
type UnknownError struct{ Name string }

func (e *UnknownError) Error() string {
	hint := ""
	if guess := Near(e.Name); len(guess) > 0 {
		hint = "; near: " + quoted(guess)
	}
	return fmt.Sprintf("fluid %q is not known%s; known: %s", clip(e.Name), hint, strings.Join(Names(), ", "))
}

// Names lists every name once, in the order of [List]; one that wants a strength has
// an example of it.
func Names() []string {
	var all []string
	for _, w := range words() {
		all = append(all, w.example())
	}
	return all
}

// Near lists the names that name may have been meant to be: those of which it is a part,
// and those a few keystrokes away, nearest first. It is empty where there is none.
func Near(name string) []string {
	bare := fold(name)
	if guess := guesses(bare); len(guess) > 0 {
		return guess
	}
	if i := strings.IndexAny(bare, "0123456789"); i >= leastPart {
		return guesses(bare[:i])
	}
	return nil
}

func guesses(bare string) []string {
	const most = 5
	var keys []string
	for _, key := range index().keys {
		if len(bare) >= leastPart && strings.Contains(key, bare) {
			keys = append(keys, key)
		}
	}
	all := examples(append(keys, near.Names(bare, index().keys)...))
	return all[:min(most, len(all))]
}

// leastPart is how many letters of a name are worth a guess.
const leastPart = 3

// examples are the names of folded ones, each once.
func examples(keys []string) []string {
	var out []string
	for _, key := range keys {
		if e := index().of(key).example(); !slices.Contains(out, e) {
			out = append(out, e)
		}
	}
	return out
}

// strength is how much of a solute there is, or of what else a name asks for.
type strength struct {
	unit.Quantity
	byVolume bool
}

// share is what stands between the number and "%" or behind it to say of what.
var share = regexp.MustCompile(`(?i)^(.*?)[\s-]*(?:(vol(?:ume)?|mass|wt|weight)[\s.-]*%|%[\s-]*(?:by[\s-]+)?(vol(?:ume)?|mass|wt|weight)\.?)\s*$`)

func (w *word) withStrength(text string) (thermo.Fluid, error) {
	var s strength
	plain := text
	if m := share.FindStringSubmatch(text); m != nil {
		plain = m[1] + " %"
		s.byVolume = strings.HasPrefix(strings.ToLower(m[2]+m[3]), "vol")
	}
	if s.byVolume && !w.volume {
		return nil, fmt.Errorf("%s is not known by volume; write %q", w.name, w.example())
	}
	var err error
	if s.Quantity, err = unit.ParseAs(plain, w.dimension); err != nil {
		return nil, fmt.Errorf("%s: %w; write %q%s", w.name, err, w.example(), w.hint())
	}
	return w.make(s)
}

// isSign tells a sign from a hyphen that joins two words.
func isSign(r rune, before string) bool {
	return strings.ContainsRune("+-−", r) && strings.HasSuffix(before, " ")
}

func beginsStrength(s string) bool {
	_, err := unit.ParseAs(s, unit.Ratio)
	return err == nil
}

// fold brings a name into the form under which it is found.
func fold(name string) string {
	return alike.Replace(strings.ToLower(strings.Map(func(r rune) rune {
		switch {
		case unicode.IsSpace(r), unicode.Is(unicode.Pd, r), r == '_':
			return -1
		case r >= '₀' && r <= '₉':
			return r - '₀' + '0'
		}
		return r
	}, name)))
}

// alike maps spellings of two countries to one.
var alike = strings.NewReplacer("sulph", "sulf", "vapour", "vapor")

func quoted(names []string) string {
	qs := make([]string, len(names))
	for i, n := range names {
		qs[i] = fmt.Sprintf("%q", n)
	}
	return strings.Join(qs, ", ")
}

// clip keeps what is quoted back in an error to a line's length.
func clip(s string) string {
	const most = 60
	if rs := []rune(s); len(rs) > most {
		return string(rs[:most]) + "..."
	}
	return s
}
