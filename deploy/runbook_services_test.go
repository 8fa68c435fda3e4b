//go:build services

package deploy

import (
	"regexp"
	"slices"
	"strings"
	"testing"
)

// TestRunbookNamesRealCommands holds each command line of the runbook to what the program's own
// help says: the command, the number of its operands, and each of its options.
func TestRunbookNamesRealCommands(t *testing.T) {
	lines := regexp.MustCompile(`(?m)^ {4,}heatreeve (.*)$`).FindAllStringSubmatch(read(t, "runbook.md"), -1)
	if len(lines) < 10 {
		t.Fatalf("%d command lines; want those of a whole runbook", len(lines))
	}
	for _, line := range lines {
		words := commandWords(line[1])
		help := must(t, native(t), words[0], "--help")
		if fault := misused(help, words); fault != "" {
			t.Errorf("heatreeve %s: %s; its help:\n%s", line[1], fault, help)
		}
	}
}

// commandWords splits a command line as a shell does one with double quotes and no other sign.
func commandWords(line string) []string {
	var words []string
	for _, m := range regexp.MustCompile(`"([^"]*)"|(\S+)`).FindAllStringSubmatch(line, -1) {
		words = append(words, m[1]+m[2])
	}
	return words
}

// misused tells what of a command line the help does not know, or "".
func misused(help string, words []string) string {
	synopsis, options, _ := strings.Cut(help, "\nOptions:\n")
	usage := strings.Join(strings.Fields(strings.SplitN(synopsis, "\n\n", 2)[0]), " ")
	name := "heatreeve " + words[0]
	if !strings.HasPrefix(usage, name) {
		return "no such command"
	}
	wants := 0
	for _, w := range strings.Fields(usage[len(name):]) {
		if strings.ContainsAny(w[:1], "[-") {
			break
		}
		wants++
	}
	var named []string
	operands := 0
	for i := 1; i < len(words); i++ {
		w := words[i]
		if !strings.HasPrefix(w, "--") {
			operands++
			continue
		}
		m := regexp.MustCompile(`(?m)^  ` + regexp.QuoteMeta(w) + `( .+)?$`).FindStringSubmatch(options)
		if m == nil {
			return "no option " + w
		}
		named = append(named, w)
		if m[1] != "" {
			i++
		}
	}
	if operands != wants {
		return "the wrong number of operands"
	}
	for _, m := range regexp.MustCompile(`\[[^\]]*\]|(--[a-z-]+)`).FindAllStringSubmatch(usage, -1) {
		if m[1] != "" && !slices.Contains(named, m[1]) && !strings.Contains(usage, "|"+m[1]) && !strings.Contains(usage, m[1]+" NAME|") {
			return m[1] + " is missing"
		}
	}
	return ""
}

// TestCommandLinesAreJudged holds the judge of command lines to some that must not pass.
func TestCommandLinesAreJudged(t *testing.T) {
	help := must(t, native(t), "explain", "--help")
	for _, line := range []string{
		"explain --data /d", "explain a b --data /d", "explain a", "explain a --data /d --load b", "explian a --data /d",
	} {
		if misused(help, commandWords(line)) == "" {
			t.Errorf("%q passes", line)
		}
	}
	if fault := misused(help, commandWords(`explain "hot water" --data /d --at 2026-12-01T06:00`)); fault != "" {
		t.Errorf("a good line: %s", fault)
	}
}
