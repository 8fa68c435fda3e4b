package deploy

import (
	"errors"
	"io/fs"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// checks has the check that reads each file; a file without one fails TestEveryFileIsChecked.
var checks = map[string]func(*testing.T, string){
	"README.md":                            checkReadme,
	"runbook.md":                           checkRunbook,
	"build":                                checkScript,
	"test":                                 checkScript,
	"systemd/heatreeve.service":            checkUnit,
	"container/Containerfile":              checkContainerfile,
	"mosquitto/mosquitto.conf":             checkMosquittoConf,
	"mosquitto/conf.d/heatreeve-tls.conf":  checkMosquittoTLS,
	"mosquitto/heatreeve.acl":              checkACL,
	"bench/README.md":                      checkBenchReadme,
	"bench/run":                            checkScript,
	"bench/go.mod":                         checkBenchModule,
	"bench/go.sum":                         checkBenchSums,
	"prometheus/prometheus.yml":            checkScrapeConfig,
	"prometheus/heatreeve.rules.yml":       checkRules,
	"prometheus/heatreeve.rules.test.yml":  checkRuleCases,
	"systemd/heatreeve.service.d/web.conf": checkWebDropIn,
	"web/web.yaml":                         checkWebConfig,
}

// shipped lists the files of this folder, without the Go package that tests them.
func shipped(t *testing.T) []string {
	t.Helper()
	var files []string
	err := filepath.WalkDir(".", func(path string, d fs.DirEntry, err error) error {
		if err == nil && !d.IsDir() && filepath.Ext(path) != ".go" {
			files = append(files, filepath.ToSlash(path))
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

func TestEveryFileIsChecked(t *testing.T) {
	files := shipped(t)
	for _, file := range files {
		t.Run(file, func(t *testing.T) {
			check, ok := checks[file]
			if !ok {
				t.Fatalf("no check reads deploy/%s; add one to the table", file)
			}
			check(t, file)
		})
	}
	if len(files) != len(checks) {
		t.Errorf("deploy has %d files and %d checks; a checked file is gone", len(files), len(checks))
	}
}

// read returns a file of this folder and fails when machine paths or an unfinished word stand in it.
func read(t *testing.T, file string) string {
	t.Helper()
	b, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	text := string(b)
	if m := regexp.MustCompile(`(?i)\b(TODO|FIXME|XXX)\b|/home/|/root/`).FindString(text); m != "" {
		t.Errorf("%s contains %q", file, m)
	}
	return text
}

// settings reads lines of a keyword and the rest, and leaves out blank lines and comments.
func settings(text string) [][2]string {
	var all [][2]string
	for line := range strings.Lines(text) {
		line = strings.TrimSpace(line)
		if line == "" || line[0] == '#' {
			continue
		}
		key, value, _ := strings.Cut(line, " ")
		all = append(all, [2]string{key, strings.TrimSpace(value)})
	}
	return all
}

func checkReadme(t *testing.T, file string) {
	text := read(t, file)
	for _, other := range shipped(t) {
		if other != file && !strings.Contains(text, "`"+other+"`") {
			t.Errorf("%s does not tell what %s is for", file, other)
		}
	}
	for _, want := range []string{"not a safety function", "not for billing"} {
		if !strings.Contains(text, want) {
			t.Errorf("%s does not say %q", file, want)
		}
	}
}

func checkScript(t *testing.T, file string) {
	text := read(t, file)
	if !strings.HasPrefix(text, "#!/usr/bin/env bash\n") || !strings.Contains(text, "\nset -euo pipefail\n") {
		t.Errorf("%s is not a bash script that stops at the first error", file)
	}
	info, err := os.Stat(file)
	if err != nil {
		t.Fatal(err)
	}
	if info.Mode()&0o111 != 0o111 {
		t.Errorf("%s has mode %v; want executable by all", file, info.Mode())
	}
	if out, err := exec.Command("bash", "-n", file).CombinedOutput(); err != nil {
		t.Errorf("bash -n %s: %v\n%s", file, err, out)
	}
}

func TestBuildRefusesWhatItDoesNotKnow(t *testing.T) {
	for _, args := range [][]string{{"--help-me"}, {t.TempDir(), "mips"}} {
		out, err := exec.Command("./build", args...).CombinedOutput()
		if exit, ok := errors.AsType[*exec.ExitError](err); !ok || exit.ExitCode() != 2 {
			t.Errorf("deploy/build %q: %v; want exit code 2", args, err)
		}
		if unknown := args[len(args)-1]; !strings.Contains(string(out), `"`+unknown+`"`) {
			t.Errorf("deploy/build %q says %q; want %q named", args, out, unknown)
		}
	}
}

// TestLandingRunsTheTestCommand holds the gate to the one command that people run, with nothing beside it.
func TestLandingRunsTheTestCommand(t *testing.T) {
	var got []string
	for line := range strings.Lines(read(t, "../.ci/run")) {
		if line = strings.TrimSpace(line); line != "" && line[0] != '#' {
			got = append(got, line)
		}
	}
	if want := `cd "$(dirname "$0")/.." && exec deploy/test`; len(got) != 1 || got[0] != want {
		t.Errorf(".ci/run does %q; want only %q", got, want)
	}
}
