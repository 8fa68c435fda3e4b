// Package named finds a fluid by the name that an engineer writes: "water",
// "CO2", "propylene glycol 32 %", "seawater 35 g/kg", "diesel 840 kg/m3".
//
// Letter case, spaces and hyphens make no difference, in the unit of a strength neither. A name that wants a strength
// has it with its unit, behind or before: "%", "‰" and "g/kg" are by mass, "vol %" is
// by volume. [List] tells every name with its range and source. The names of the trade
// for the same fluids ("hot water", "R717", "40 % MEG") are found as well, and those
// that may mean several fluids, or need a declaration, are answered with how to
// write it.
package named

import (
	"fmt"
	"strings"
	"unicode"

	"heatreeve/thermo"
)

// Lookup returns the fluid of that name. The error of an unknown name is an
// *[UnknownError]; that of a name without its strength, or with a wrong one, says how
// it is written.
func Lookup(name string) (thermo.Fluid, error) {
	if r, ok := read(name); ok {
		return r.fluid()
	}
	if f, ok := families(name); ok {
		return f, nil
	}
	if one, tail, ok := readSet(name); ok {
		return nil, refuse(one, tail)
	}
	return nil, &UnknownError{name}
}

// Listed tells whether the name is one of [List], with its strength where it wants one.
// The names of the trade are not: they are free for a fluid of one's own.
func Listed(name string) bool {
	r, ok := read(name)
	if !ok || r.aside {
		return false
	}
	_, err := r.fluid()
	return err == nil
}

// families asks those that know more names than they list.
func families(name string) (thermo.Fluid, bool) {
	for _, find := range otherwise {
		if f, err := find(strings.TrimSpace(name)); err == nil {
			return f, true
		}
	}
	return nil, false
}

// UnknownError says that no fluid has the name, with the near ones and all, or with how
// to declare what it means.
type UnknownError struct{ Name string }

func (e *UnknownError) Error() string { return e.Hint() + "; known: " + strings.Join(Names(), ", ") }

// Advice says what the name means in the trade and how that is written, or is "".
func (e *UnknownError) Advice() string {
	if t := trade(e.Name); t != nil {
		return t.advice
	}
	return ""
}

// Hint is the error without the list of all names. Where no name is near, it tells those
// whose spelling is the nearest as no more than that.
func (e *UnknownError) Hint() string {
	if advice := e.Advice(); advice != "" {
		return fmt.Sprintf("fluid %q %s", clip(e.Name), advice)
	}
	say := fmt.Sprintf("fluid %q is not known", clip(e.Name))
	if guess := e.Near(); len(guess) > 0 {
		return say + "; near: " + quoted(guess)
	}
	if guess := e.Nearest(); len(guess) > 0 {
		say += "; nearest by spelling: " + quoted(guess)
	}
	return say + "; one of your own is declared by its figures, {table: ...} or {polynomial: ...}"
}

// Names lists every name once, in the order of [List]; one that wants a strength has an
// example of it.
func Names() []string {
	var all []string
	for _, w := range words() {
		all = append(all, w.example())
	}
	return all
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

// alike maps spellings of two countries to one, and an element's older name to its name.
var alike = strings.NewReplacer("sulph", "sulf", "vapour", "vapor", "ized", "ised", "natrium", "sodium", "kalium", "potassium")

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
