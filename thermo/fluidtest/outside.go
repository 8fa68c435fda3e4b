//go:build services

package fluidtest

import (
	"bytes"
	"encoding/json"
	"os/exec"
	"testing"
)

// Python has a script for Debian's Python, which is in need of a package, answer each of a list
// of states: JSON in, JSON out.
func Python[Answer, State any](t testing.TB, needs, script string, states []State) []Answer {
	t.Helper()
	return Ask[Answer](t, "Debian's package "+needs, exec.Command("/usr/bin/python3", "-c", script), states)
}

// Ask has any other program do the same. A program that is missing or fails, or answers
// fewer or more states than it was given, ends the test by the name of what it needs.
func Ask[Answer, State any](t testing.TB, needs string, program *exec.Cmd, states []State) []Answer {
	t.Helper()
	in, err := json.Marshal(states)
	if err != nil {
		t.Fatal(err)
	}
	var complaint bytes.Buffer
	program.Stdin, program.Stderr = bytes.NewReader(in), &complaint
	out, err := program.Output()
	if err != nil {
		t.Fatalf("%s: %v\n%s", needs, err, complaint.String())
	}
	var answers []Answer
	if err := json.Unmarshal(out, &answers); err != nil {
		t.Fatalf("%s: %v in %.200q", needs, err, out)
	}
	if len(answers) != len(states) {
		t.Fatalf("%s: %d answers to %d states", needs, len(answers), len(states))
	}
	return answers
}
