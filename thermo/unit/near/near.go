// Package near finds the known names that an unknown one may have been meant to be.
package near

import (
	"cmp"
	"slices"
	"strings"
	"unicode/utf8"
)

// longest name that is compared, in letters. Nobody mistypes more, and the work
// grows with the square.
const longest = 80

// Names returns the known names that differ from name by letter case only or,
// where there is none, those a few keystrokes away, nearest first. A name of up
// to five letters may be one keystroke off, a longer one two.
func Names(name string, known []string) []string {
	letters := utf8.RuneCountInString(name)
	if letters > longest {
		return nil
	}
	reach := 1
	if letters > 5 {
		reach = 2
	}
	type candidate struct {
		name string
		far  int
	}
	var cs []candidate
	for _, k := range known {
		far := Distance(strings.ToLower(name), strings.ToLower(k))
		if far <= reach && !slices.Contains(cs, candidate{k, far}) {
			cs = append(cs, candidate{k, far})
		}
	}
	slices.SortStableFunc(cs, func(a, b candidate) int { return cmp.Compare(a.far, b.far) })
	var names []string
	for _, c := range cs {
		if cs[0].far == 0 && c.far > 0 {
			break
		}
		names = append(names, c.name)
	}
	return names
}

// Distance counts the insertions, deletions, replacements and swaps of two
// neighbours that lead from a to b, none of them touching a place twice
// (optimal string alignment).
func Distance(a, b string) int {
	from, to := []rune(a), []rune(b)
	before, last, row := make([]int, len(to)+1), make([]int, len(to)+1), make([]int, len(to)+1)
	for j := range row {
		row[j] = j
	}
	for i := 1; i <= len(from); i++ {
		before, last, row = last, row, before
		row[0] = i
		for j := 1; j <= len(to); j++ {
			differ := 1
			if from[i-1] == to[j-1] {
				differ = 0
			}
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+differ)
			if i > 1 && j > 1 && from[i-1] == to[j-2] && from[i-2] == to[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
	}
	return row[len(to)]
}
