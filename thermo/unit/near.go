package unit

import (
	"cmp"
	"errors"
	"fmt"
	"slices"
	"strings"
	"unicode/utf8"
)

// unknown is the error for a name that no unit has.
func unknown(symbol string, allowed []Dimension) error {
	if strings.TrimSpace(symbol) == "" {
		return errors.New("unit is missing" + hint("; allowed here: ", allowed))
	}
	msg := fmt.Sprintf("unit %q is not known", clip(symbol))
	same, close := near(spelling(symbol), allowed)
	switch {
	case len(same) > 0:
		msg += "; letter case matters, near: " + quoted(same)
	case len(close) > 0:
		msg += "; near: " + quoted(close)
	}
	return errors.New(msg + hint("; allowed here: ", allowed))
}

// near lists the names that differ from key by letter case only, and those a
// few keystrokes away, nearest first, one name a unit.
func near(key string, allowed []Dimension) (same, close []string) {
	const most = 5
	if utf8.RuneCountInString(key) > 40 {
		return nil, nil
	}
	type candidate struct {
		name string
		far  int
	}
	var cs []candidate
	reach := min(2, max(1, utf8.RuneCountInString(key)/3))
	for _, r := range table {
		if len(allowed) > 0 && !slices.Contains(allowed, r.Dimension) {
			continue
		}
		best := candidate{far: reach + 1}
		for _, name := range r.names() {
			if far := distance(fold(key), fold(spelling(name))); far < best.far {
				best = candidate{name, far}
			}
		}
		switch {
		case best.far == 0 && !slices.Contains(same, best.name):
			same = append(same, best.name)
		case best.far <= reach && best.far > 0:
			cs = append(cs, best)
		}
	}
	slices.SortStableFunc(cs, func(a, b candidate) int { return cmp.Compare(a.far, b.far) })
	for _, c := range cs {
		if !slices.Contains(close, c.name) && len(close) < most {
			close = append(close, c.name)
		}
	}
	return same, close
}

func fold(s string) []rune { return []rune(strings.ToLower(s)) }

// distance counts the insertions, deletions, replacements and swaps of
// neighbours that lead from a to b (optimal string alignment).
func distance(a, b []rune) int {
	before, last, row := make([]int, len(b)+1), make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := 1; i <= len(a); i++ {
		before, last, row = last, row, before
		row[0] = i
		for j := 1; j <= len(b); j++ {
			differ := 1
			if a[i-1] == b[j-1] {
				differ = 0
			}
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+differ)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
	}
	return row[len(b)]
}

// describe names dimensions with their usual units: "pressure (Pa, kPa, bar)".
func describe(ds []Dimension) string {
	const most = 8
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
