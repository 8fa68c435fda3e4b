package deploy

import (
	"encoding/json"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// checkBenchReadme holds the benchmarks that are named there, and that the command runs, to
// those that there are, and wants each row of the table told.
func checkBenchReadme(t *testing.T, file string) {
	text := read(t, file)
	have := benchmarks(t)
	for _, from := range []string{text, read(t, "bench/run")} {
		names := regexp.MustCompile(`Benchmark(\w+|\(\w+(\|\w+)*\))`).FindAllString(from, -1)
		if len(names) < 5 {
			t.Errorf("%s or bench/run names only %q", file, names)
		}
		for _, name := range names {
			for _, end := range strings.Split(strings.Trim(strings.TrimPrefix(name, "Benchmark"), "()"), "|") {
				if !have["Benchmark"+end] {
					t.Errorf("%s or bench/run names Benchmark%s, which is nowhere", file, end)
				}
			}
		}
	}
	for _, what := range regexp.MustCompile(`(?m)^\t(?:\{|message\(|memory\()"([^"]+)"`).FindAllStringSubmatch(read(t, "bench/table/rows.go"), -1) {
		if !strings.Contains(text, "| "+what[1]+" |") {
			t.Errorf("the table in %s has no row %q", file, what[1])
		}
	}
}

// benchmarks are the names of all that the project has.
func benchmarks(t *testing.T) map[string]bool {
	t.Helper()
	have := map[string]bool{}
	err := filepath.WalkDir("..", func(path string, _ os.DirEntry, err error) error {
		if err != nil || !strings.HasSuffix(path, "_test.go") {
			return err
		}
		text, err := os.ReadFile(path)
		for _, m := range regexp.MustCompile(`(?m)^func (Benchmark\w+)\(`).FindAllStringSubmatch(string(text), -1) {
			have[m[1]] = true
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return have
}

// checkBenchModule wants the libraries that both modules use in one version, or the comparison
// would not be with the same.
func checkBenchModule(t *testing.T, file string) {
	bench, product := required(t, file), required(t, "../go.mod")
	both := 0
	for path, version := range bench {
		if ours := product[path]; ours != "" {
			both++
			if ours != version {
				t.Errorf("%s has %s %s, the product %s", file, path, version, ours)
			}
		}
	}
	if both < 3 {
		t.Errorf("%s shares %d libraries with the product, want at least the three that are compared", file, both)
	}
}

// required lists the modules that a file requires directly.
func required(t *testing.T, file string) map[string]string {
	t.Helper()
	read(t, file)
	out, err := exec.Command("go", "mod", "edit", "-json", file).Output()
	if err != nil {
		t.Fatalf("go mod edit %s: %v", file, err)
	}
	var module struct {
		Require []struct {
			Path, Version string
			Indirect      bool
		}
	}
	if err := json.Unmarshal(out, &module); err != nil {
		t.Fatal(err)
	}
	all := map[string]string{}
	for _, r := range module.Require {
		if !r.Indirect {
			all[r.Path] = r.Version
		}
	}
	return all
}

// checkBenchSums wants a checksum of every module that is required.
func checkBenchSums(t *testing.T, file string) {
	text := read(t, file)
	for path, version := range required(t, "bench/go.mod") {
		if path != "heatreeve" && !strings.Contains(text, path+" "+version+" h1:") {
			t.Errorf("%s has no checksum of %s %s", file, path, version)
		}
	}
}
