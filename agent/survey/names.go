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
	if before, _, ok := inBrackets(parts[len(parts)-1]); ok {
		parts = append(slices.Clone(parts[:len(parts)-1]), before)
	}
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

// own are the names that lead to a signal, from the topic's first level on; at least one.
func own(s *Signal) []string {
	parts := slices.DeleteFunc(levels(s.Topic), func(level string) bool { return level == "" })
	if s.Metric != "" {
		parts = append(parts, slices.DeleteFunc(levels(s.Metric), func(level string) bool { return level == "" || slices.Contains(valueWords, plain(level)) })...)
	}
	for _, token := range strings.Split(s.Value, "/")[1:] {
		if !slices.Contains(valueWords, plain(token)) && token != "" {
			parts = append(parts, withoutValue(key("/"+token)))
		}
	}
	if len(parts) == 0 {
		return []string{"tag"} // of the topic "/", say
	}
	return parts
}

// levels are those of a topic or metric, where what belongs together is together: the
// letters of an instrument with its number ("TE/77"), a unit in brackets ("[m3/h]"); and
// without the end of a name that says no more than that it is the value.
func levels(path string) []string {
	var all []string
	for _, level := range strings.Split(path, "/") {
		last := len(all) - 1
		switch {
		case last >= 0 && strings.LastIndexAny(all[last], "[(") > strings.LastIndexAny(all[last], "])") && strings.ContainsAny(level, "])"):
			all[last] += "/" + level
		case last >= 0 && isTag(all[last], level):
			all[last] += "-" + level
		default:
			all = append(all, level)
		}
	}
	for i := range all {
		all[i] = withoutValue(all[i])
	}
	return all
}

// isTag tells whether two levels are the letters and the number of one instrument.
func isTag(letters, number string) bool {
	if strings.Trim(letters, "ABCDEFGHIJKLMNOPQRSTUVWXYZ") != "" || strings.Trim(number, "0123456789") != "" {
		return false
	}
	_, ok := byLetters(letters + "-" + number)
	return ok
}

// withoutValue is a name without an end such as ".PV".
func withoutValue(name string) string {
	if i := strings.LastIndexAny(name, "._"); i > 0 && slices.Contains(valueWords, plain(name[i:])) {
		return name[:i]
	}
	return name
}

// inBrackets is the unit that stands in brackets at the end of a name, and what is before.
func inBrackets(name string) (before string, u unit.Unit, ok bool) {
	text := strings.TrimRight(name, " ")
	open := strings.LastIndexAny(text, "[(")
	if open < 0 || !strings.HasSuffix(text, "]") && !strings.HasSuffix(text, ")") {
		return name, u, false
	}
	inside := strings.TrimSpace(text[open+1 : len(text)-1])
	if strings.Trim(inside, "0123456789.") == "" {
		return name, u, false
	}
	u, err := unit.LookupAs(inside, tells...)
	if before = strings.TrimRight(text[:open], " _-."); err != nil || before == "" {
		return name, u, false
	}
	return before, u, true
}
