package deploy

import (
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
)

// everywhere are programs and Python modules that need no package of their own in deploy/test: Debian's base, the Go
// that runs the test, Python's own library, and what the packages bring along.
var everywhere = []string{"bash", "go", "json", "math", "numpy", "random", "sys", "warnings"}

var (
	called   = regexp.MustCompile(`(?:exec\.Command|exec\.CommandContext|program|must|output)\((?:[a-z]\w*(?:\.Context\(\)|\(t\))?, )?"([a-z][\w-]*)"`)
	imported = regexp.MustCompile(`(?m)^(?:import|from) ([a-z]\w*(?:, [a-z]\w*)*)( from ['"])?`)
)

// outside lists the programs and Python modules that a test calls by name.
func outside(text string) []string {
	var names []string
	for _, m := range called.FindAllStringSubmatch(text, -1) {
		names = append(names, m[1])
	}
	for _, m := range imported.FindAllStringSubmatch(text, -1) {
		if m[2] != "" { // JavaScript: npm fetches it
			continue
		}
		names = append(names, strings.Split(m[1], ", ")...)
	}
	return slices.DeleteFunc(names, func(name string) bool { return slices.Contains(everywhere, name) })
}

// installs tells whether the script looks for a program or a module.
func installs(script, name string) bool {
	return regexp.MustCompile(`\s`+name+`:`).MatchString(script) || strings.Contains(script, "'import "+name+"'")
}

// TestTheTestCommandInstallsWhatTestsCall keeps deploy/test in step with every test of the project that carries the tag.
func TestTheTestCommandInstallsWhatTestsCall(t *testing.T) {
	script := read(t, "test")
	found := map[string]bool{}
	err := filepath.WalkDir("..", func(path string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() || !strings.HasSuffix(path, "_test.go") {
			return err
		}
		text, err := os.ReadFile(path)
		if err != nil || !strings.HasPrefix(string(text), "//go:build services\n") {
			return err
		}
		for _, name := range outside(string(text)) {
			if !found[name] && !installs(script, name) {
				t.Errorf("%s needs %s; deploy/test does not look for it", path, name)
			}
			found[name] = true
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{"mosquitto", "mosquitto_pub", "promtool", "qemu-arm-static", "systemd-analyze", "node", "npm", "iapws"} {
		if !found[name] {
			t.Errorf("no test is seen to call %s", name)
		}
	}
	if installs(script, "gnuplot") || installs(script, "scipy") {
		t.Error("deploy/test is taken to install what it does not")
	}
}

// TestTheTestCommandWantsEveryService holds it to failing where a service is missing: it says so to the tests, and it
// looks a second time after the installation.
func TestTheTestCommandWantsEveryService(t *testing.T) {
	script := read(t, "test")
	for _, want := range []string{"export HEATREEVE_SERVICES=required", `die "still missing after the installation: ${missing[*]}"`} {
		if !strings.Contains(script, want) {
			t.Errorf("deploy/test does not say %q", want)
		}
	}
}
