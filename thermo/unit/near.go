package unit

import (
	"errors"
	"fmt"
	"slices"
	"strings"
	"unicode/utf8"

	"heatreeve/thermo/unit/near"
)

// unknown is the error for a name that no unit has.
func unknown(symbol string, allowed []Dimension) error {
	if strings.TrimSpace(symbol) == "" {
		return errors.New("unit is missing" + hint("; allowed here: ", allowed))
	}
	msg := fmt.Sprintf("unit %q is not known", clip(symbol))
	if names := nearest(symbol, allowed); len(names) > 0 {
		lead := "; near: "
		if strings.EqualFold(names[0], spelling(symbol)) {
			lead = "; letter case matters, near: "
		}
		msg += lead + quoted(names)
	}
	return errors.New(msg + hint("; allowed here: ", allowed))
}

// nearest lists near names of allowed units, one name a unit.
func nearest(symbol string, allowed []Dimension) []string {
	const most = 5
	var known []string
	for _, r := range table {
		if len(allowed) == 0 || slices.Contains(allowed, r.Dimension) {
			for _, name := range r.names() {
				known = append(known, spelling(name))
			}
		}
	}
	var names []string
	seen := make(map[Unit]bool)
	for _, name := range near.Names(spelling(symbol), known) {
		if u := index()[name][0]; !seen[u] && len(names) < most {
			seen[u] = true
			names = append(names, name)
		}
	}
	return names
}

// describe names dimensions with their usual units: "pressure (Pa, kPa, bar)".
func describe(ds []Dimension) string {
	most := 8
	if len(ds) > 1 {
		most = 4
	}
	var parts []string
	for _, d := range ds {
		var symbols []string
		for _, u := range Named(d) {
			symbols = append(symbols, u.Symbol)
		}
		if len(symbols) > most {
			symbols = append(symbols[:most], "...")
		}
		parts = append(parts, fmt.Sprintf("%s (%s)", d, strings.Join(symbols, ", ")))
	}
	return strings.Join(parts, ", or ")
}

func hint(lead string, allowed []Dimension) string {
	if len(allowed) == 0 {
		return ""
	}
	return lead + describe(allowed)
}

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
	if utf8.RuneCountInString(s) <= most {
		return s
	}
	return string([]rune(s)[:most]) + "..."
}
