package deploy

import (
	"maps"
	"regexp"
	"slices"
	"strings"
	"testing"
)

var (
	anchored = regexp.MustCompile(`(?m)^<a id="(\w+)"></a>\n## (\w+)\n((?s).*?)(?:\z|\n<a id=)`)
	titled   = regexp.MustCompile(`(?m)^## (Heatreeve\w+)$`)
)

// sections are the texts of the runbook by their alerts.
func sections(t *testing.T, file string) map[string]string {
	t.Helper()
	text := read(t, file)
	all := map[string]string{}
	for i := 0; ; {
		m := anchored.FindStringSubmatchIndex(text[i:])
		if m == nil {
			break
		}
		anchor, title := text[i+m[2]:i+m[3]], text[i+m[4]:i+m[5]]
		if anchor != title {
			t.Errorf("%s: anchor %q before the section %q", file, anchor, title)
		}
		if _, twice := all[title]; twice {
			t.Errorf("%s: two sections %q", file, title)
		}
		all[title] = text[i+m[6] : i+m[7]]
		i += m[7]
	}
	if n := len(titled.FindAllString(text, -1)); n != len(all) {
		t.Errorf("%s: %d sections on alerts, %d with an anchor", file, n, len(all))
	}
	return all
}

// checkRunbook wants a section for each alert and an alert for each section, in which it says what
// the alert means, in which order to look, and what to do or when to acknowledge.
func checkRunbook(t *testing.T, file string) {
	told := sections(t, file)
	var want []string
	for _, r := range readRules(t, "prometheus/heatreeve.rules.yml") {
		want = append(want, r.Alert)
		words := []string{"**Means:**", "\n1. ", "\n2. ", "**Do:**"}
		if r.group == "heatreeve-verdict" {
			words = []string{"**Means:**", "\n1. ", "\n2. ", "**Acknowledge**", "**Shelve**"}
		}
		for _, word := range words {
			if !strings.Contains(told[r.Alert], word) {
				t.Errorf("%s: the section %s has no %q", file, r.Alert, word)
			}
		}
	}
	slices.Sort(want)
	if got := slices.Sorted(maps.Keys(told)); !slices.Equal(got, want) {
		t.Errorf("%s has sections on %q; the alerts are %q", file, got, want)
	}
	text := read(t, file)
	for _, m := range regexp.MustCompile(`\bHeatreeve[A-Z]\w+`).FindAllString(text, -1) {
		if !slices.Contains(want, m) {
			t.Errorf("%s names %s, which is no alert", file, m)
		}
	}
	for _, hazard := range []string{"°C", "flashes", "Blocked-in", "Legionella", "Isolate, lock, tag", "licensed people", "not a safety function", "not for billing"} {
		if !strings.Contains(text, hazard) {
			t.Errorf("%s does not speak of %q", file, hazard)
		}
	}
}
