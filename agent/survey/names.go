package survey

import (
	"fmt"
	"slices"
	"strings"
	"unicode"

	"heatreeve/thermo/unit"
)

// longestTag is how long a tag's name becomes at most, characters.
const longestTag = 60

// nameTags gives each signal a name of its own: as short as its own name allows, with
// levels of its topic before it where that is taken.
func nameTags(topics []Topic) {
	var open []*Signal
	deepest := 1
	for i := range topics {
		for k := range topics[i].Signals {
			s := &topics[i].Signals[k]
			open, deepest = append(open, s), max(deepest, len(own(s)))
		}
	}
	taken := map[string]bool{}
	for levels := 1; levels <= deepest; levels++ {
		open = settle(open, taken, func(s *Signal) string { return tagName(s, levels) })
	}
	for i, s := range open {
		s.Tag = fmt.Sprintf("%s-%d", tagName(s, deepest), i+1)
	}
}

// settle names those whose name no other wants or has, and returns the others.
func settle(open []*Signal, taken map[string]bool, name func(*Signal) string) (rest []*Signal) {
	wanted := map[string]int{}
	for _, s := range open {
		wanted[name(s)]++
	}
	for _, s := range open {
		if n := name(s); wanted[n] == 1 && !taken[n] {
			s.Tag, taken[n] = n, true
		} else {
			rest = append(rest, s)
		}
	}
	return rest
}

// tagName is made of so many names of a signal, the last one first.
func tagName(s *Signal, levels int) string {
	parts := own(s)
	parts = parts[max(0, len(parts)-levels):]
	name := strings.Map(func(r rune) rune {
		if r == '-' || r == '_' || r == '.' || unicode.IsLetter(r) || unicode.IsDigit(r) {
			return r
		}
		return '_'
	}, strings.Join(parts, "-"))
	if runes := []rune(name); len(runes) > longestTag {
		name = string(runes[len(runes)-longestTag:])
	}
	if _, err := unit.Parse(name); err == nil || name == "" || !strings.ContainsFunc(name, unicode.IsLetter) {
		name = "tag-" + name
	}
	return name
}

// own are the names that lead to a signal, from the topic's first level on.
func own(s *Signal) []string {
	parts := slices.DeleteFunc(strings.Split(s.Topic, "/"), func(level string) bool { return level == "" })
	if s.Metric != "" {
		parts = append(parts, slices.DeleteFunc(strings.Split(s.Metric, "/"), func(level string) bool { return level == "" || slices.Contains(valueWords, plain(level)) })...)
	}
	for _, token := range strings.Split(s.Value, "/")[1:] {
		if !slices.Contains(valueWords, plain(token)) && token != "" {
			parts = append(parts, key("/"+token))
		}
	}
	return parts
}
