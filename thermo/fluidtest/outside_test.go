//go:build services

package fluidtest

import (
	"os/exec"
	"slices"
	"strings"
	"testing"
)

func TestPythonAnswers(t *testing.T) {
	type answer struct{ Twice float64 }
	script := `import json, sys; print(json.dumps([{"twice": 2 * x} for x in json.load(sys.stdin)]))`
	got := Python[answer](t, "python3", script, []float64{0.1, 300})
	if !slices.Equal(got, []answer{{0.2}, {600}}) {
		t.Errorf("answers %v", got)
	}
}

func TestPythonRefuses(t *testing.T) {
	for _, tt := range []struct{ fault, script, want string }{
		{"a missing module", "import no_such_fluids", "Debian's package python3-fluids: exit status 1\nTraceback"},
		{"no JSON", "print('water')", `"water\n"`},
		{"NaN", "print('[1, NaN]')", "invalid character 'N'"},
		{"an answer too few", "print([1])", "1 answers to 2 states"},
		{"an answer too many", "print([1, 2, 3])", "3 answers to 2 states"},
	} {
		said := ending(func(t testing.TB) { Python[float64](t, "python3-fluids", tt.script, []float64{1, 2}) })
		if !strings.HasPrefix(said, "Debian's package python3-fluids: ") || !strings.Contains(said, tt.want) {
			t.Errorf("%s: ended with %q, want %q", tt.fault, said, tt.want)
		}
	}
	missing := exec.Command("/usr/bin/no-such-program")
	said := ending(func(t testing.TB) { Ask[float64](t, "a program", missing, []float64{1}) })
	if !strings.HasPrefix(said, "a program: ") || !strings.Contains(said, "no-such-program") {
		t.Errorf("a missing program: ended with %q", said)
	}
}
