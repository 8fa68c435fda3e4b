package main

import (
	"strings"
	"testing"
	"unicode/utf8"
)

func TestWrapped(t *testing.T) {
	text := strings.Repeat("ééééééé ", 20)
	got := wrapped(text, "  ")
	if strings.Join(strings.Fields(got), " ") != strings.TrimSpace(text) {
		t.Errorf("words lost in %q", got)
	}
	for i, line := range strings.Split(got, "\n") {
		if n := utf8.RuneCountInString(line); n > width || i > 0 && !strings.HasPrefix(line, "  é") {
			t.Errorf("%d columns: %q", n, line)
		}
	}
	if got := listing([]string{"a b", "c"}, "  "); got != "  a b, c" {
		t.Errorf("listing %q", got)
	}
	if got := indented("a", "  ") + wrapped(strings.Repeat("x", 100), " "); got != "  a"+strings.Repeat("x", 100) {
		t.Errorf("%q", got)
	}
}

// What is told for people fits a terminal of 80 columns, but for declarations, which are
// to be copied, and for errors, which are of one line.
func TestOutputFitsATerminal(t *testing.T) {
	told := [][]string{{"help"}}
	for _, c := range commands {
		told = append(told, []string{c.name, "--help"})
	}
	for _, args := range append(told, [][]string{
		{"properties", "--list"},
		{"properties", "unobtainium", "--temperature", "20 °C"},
		{"properties", "propylene glycol 32 %", "--temperature", "-5 °C, 20 °C, 60 °C", "--pressure", "3 bar"},
		{"properties", "CO2", "--temperature", "20 °C", "--pressure", "30 bar"},
		{"properties", "water", "--temperature", "300 °C", "--pressure", "200 bar"},
		{"duty", "water", "--flow", "13.5 m3/h", "--from", "130 °C", "--to", "90 °C", "--pressure", "7 bar"},
		{"properties", "{flue gas: {fuel: {CH4: 92 %, C2H6: 8 %}, excess air: 15 %}, model: ideal}", "--temperature", "132.5 °C"},
		{"properties", "{flue gas: {fuel: {CH4: 92 %, C2H6: 8 %}, excess air: 15 %}, model: ideal}", "--temperature", "132.5 °C,180 °C"},
		{"duty", "{flue gas: {fuel: {CH4: 92 %, C2H6: 8 %}, excess air: 15 %}}", "--flow", "12 000 Nm3/h", "--from", "241.5 °C", "--to", "132.5 °C"},
	}...) {
		_, out, errs := invoke(args...)
		if out+errs == "" {
			t.Errorf("%q tells nothing", args)
		}
		for line := range strings.Lines(out + errs) {
			line = strings.TrimSuffix(line, "\n")
			if n := utf8.RuneCountInString(line); n > width && !strings.HasPrefix(strings.TrimSpace(line), "'{") && !strings.HasPrefix(line, "error: ") {
				t.Errorf("%q: a line of %d columns: %s", args, n, line)
			}
		}
	}
}
