package main

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"heatreeve/agent"
)

func invoke(args ...string) (status int, stdout, stderr string) {
	var out, errs bytes.Buffer
	status = run(context.Background(), args, &out, &errs)
	return status, out.String(), errs.String()
}

func TestExitStatusAndMessages(t *testing.T) {
	dir := t.TempDir()
	wrong := filepath.Join(dir, "wrong.yaml")
	if err := os.WriteFile(wrong, []byte("site: X\ntimezone: Mars/Olympus\nlaods: {}\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	occupied := filepath.Join(dir, "file")
	if err := os.WriteFile(occupied, nil, 0o644); err != nil {
		t.Fatal(err)
	}
	example := "../../../configs/brackwater-creamery.yaml"
	for _, tt := range []struct {
		args   string
		status int
		out    string // in what is printed
		err    string // in what is said of the failure
	}{
		{"", exitWrong, "heatreeve run --site FILE", ""},
		{"help", exitGood, agent.Safety, ""},
		{"--help", exitGood, agent.Safety, ""},
		{"help run", exitGood, "--site FILE", ""},
		{"--version", exitGood, "heatreeve development", ""},
		{"run --help", exitGood, agent.Safety, ""},
		{"check --help", exitGood, agent.Safety, ""},
		{"demo --help", exitGood, "--speed", ""},
		{"version", exitGood, "heatreeve development", ""},
		{"version extra", exitWrong, "", `unexpected "extra"`},
		{"chekc", exitWrong, "", `unknown command "chekc"; near: check; known: run, check, survey, demo, report, explain, learn, export, warnings, acknowledge, shelve, events, salvage, properties, duty, version, help`},
		{"listen", exitWrong, "", `unknown command "listen"; known: run`},
		{"prop", exitWrong, "", `unknown command "prop"; near: properties; known: run`},
		{"check", exitWrong, "", "the site file is missing"},
		{"check " + example, exitGood, `good: "Brackwater Creamery", tags: 14, loads: 4`, ""},
		{"check ../../../configs/tarnholt-heat-works.yaml", exitGood, "note: broker.ca: ", ""},
		{"check ../../../configs/orrin-sound-works.yaml", exitGood, `good: "Orrin Sound Works", tags: 50, loads: 16`, ""},
		{"check " + wrong, exitWrong, "", `wrong.yaml:2:`},
		{"check " + wrong, exitWrong, "", `laods`},
		{"check nowhere.yaml", exitWrong, "", "nowhere.yaml"},
		{"run", exitWrong, "", "--site and --data must be given"},
		{"run --sitte x", exitWrong, "", "sitte"},
		{"run --site " + example + " --data " + dir + " --listen nonsense", exitWrong, "", `--listen "nonsense"`},
		{"run --site " + example + " --data " + dir + " --listen :0", exitWrong, "", "heatreeve run: --listen \":0\": others than this machine could look there"},
		{"run --site " + example + " --data " + dir + " --web-config nowhere.yaml", exitWrong, "", "nowhere.yaml"},
		{"run --site " + example + " --data " + dir + " --web-config " + wrong, exitWrong, "", "field site not found"},
		{"demo --listen 0.0.0.0:0", exitWrong, "", "let everybody look with --openly"},
		{"demo --web-config " + wrong, exitWrong, "", "field laods not found"},
		{"run --site " + wrong + " --data " + dir, exitWrong, "", "wrong.yaml:2:"},
		{"run --site " + example + " --data " + occupied + "/x", exitFailed, "", "data folder"},
		{"demo --speed 0", exitWrong, "", "--speed"},
		{"demo --for tomorrow", exitWrong, "", "tomorrow"},
	} {
		status, out, errs := invoke(strings.Fields(tt.args)...)
		if status != tt.status || !strings.Contains(out, tt.out) || !strings.Contains(errs, tt.err) {
			t.Errorf("heatreeve %s: status %d, printed %q, said %q; want %d, ...%q..., ...%q...", tt.args, status, out, errs, tt.status, tt.out, tt.err)
		}
	}
}

// An agent that is refused has begun nothing.
func TestRefusedBeforeItBegins(t *testing.T) {
	data := filepath.Join(t.TempDir(), "data")
	for _, wrong := range []string{"--listen :0", "--web-config nowhere.yaml"} {
		for _, command := range []string{"demo", "run --site ../../../configs/brackwater-creamery.yaml"} {
			status, out, _ := invoke(strings.Fields(command + " --data " + data + " " + wrong)...)
			if _, err := os.Stat(data); status != exitWrong || out != "" || err == nil {
				t.Errorf("%s %s: status %d, printed %q; data folder: %v", command, wrong, status, out, err)
			}
		}
	}
}

// Help names every command and every option that there is, and no other.
func TestHelpNamesTheOptions(t *testing.T) {
	_, all, _ := invoke("help")
	for _, c := range commands {
		_, help, _ := invoke(c.name, "--help")
		if !strings.Contains(all, "heatreeve "+c.name) || !strings.Contains(help, "heatreeve "+c.name) {
			t.Errorf("help does not name %s", c.name)
		}
		for _, word := range strings.FieldsFunc(c.operand, func(r rune) bool { return strings.ContainsRune(" []|", r) }) {
			if strings.HasPrefix(word, "--") && !strings.Contains(help, "\n  "+word+" ") && !strings.Contains(help, "\n  "+word+"\n") {
				t.Errorf("%s: usage names %s, the options do not:\n%s", c.name, word, help)
			}
		}
		for line := range strings.Lines(help) {
			if option, ok := strings.CutPrefix(line, "  --"); ok && !strings.Contains(c.operand, "--"+strings.TrimSpace(option)) {
				t.Errorf("%s: the options name --%s, usage does not: %s", c.name, strings.TrimSpace(option), c.operand)
			}
		}
	}
}
