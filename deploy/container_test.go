package deploy

import (
	"encoding/json"
	"path"
	"regexp"
	"slices"
	"strings"
	"testing"
)

// instruction is one line of a container recipe, continuation lines joined.
type instruction struct{ name, rest string }

func parseContainerfile(text string) []instruction {
	var all []instruction
	for _, s := range settings(strings.ReplaceAll(text, "\\\n", " ")) {
		all = append(all, instruction{s[0], s[1]})
	}
	return all
}

// knownInstructions are those of the container file format that this recipe has a use for; ADD, which fetches and
// unpacks without being asked, is left out on purpose.
var knownInstructions = []string{"FROM", "ARG", "WORKDIR", "COPY", "RUN", "LABEL", "ENV", "USER", "VOLUME", "EXPOSE", "ENTRYPOINT", "CMD"}

func checkContainerfile(t *testing.T, file string) {
	all := parseContainerfile(read(t, file))
	start := 0
	for i, in := range all {
		if !slices.Contains(knownInstructions, in.name) {
			t.Errorf("instruction %s %s is not one of %v", in.name, in.rest, knownInstructions)
		}
		if in.name == "FROM" {
			start = i
		}
	}
	if all[0].name != "FROM" && all[0].name != "ARG" || start == 0 {
		t.Fatalf("want a stage that builds and a last one that runs")
	}
	checkBuildStage(t, all[:start])
	checkLastStage(t, all[start:])
}

// checkBuildStage wants the binary to come from the script that TestBinaries proves, from a Go not older than go.mod's.
func checkBuildStage(t *testing.T, stage []instruction) {
	t.Helper()
	goVersion := regexp.MustCompile(`(?m)^go (\d+\.\d+)`).FindStringSubmatch(read(t, "../go.mod"))[1]
	if want := "golang:" + goVersion; !strings.HasPrefix(stage[0].rest, want) {
		t.Errorf("build stage is from %q; go.mod asks for %s", stage[0].rest, want)
	}
	if !slices.ContainsFunc(stage, func(in instruction) bool {
		return in.name == "RUN" && strings.Contains(in.rest, "deploy/build /out ")
	}) {
		t.Error("the binary is not made by deploy/build")
	}
}

func checkLastStage(t *testing.T, stage []instruction) {
	t.Helper()
	only := map[string]string{}
	for _, in := range stage {
		only[in.name] = in.rest
		if from := strings.Fields(in.rest)[0]; in.name == "COPY" && from != "--from=build" {
			t.Errorf("COPY %s: the last stage takes only what was built", in.rest)
		}
		if in.name == "RUN" {
			t.Errorf("RUN %s: an empty image has nothing to run it with", in.rest)
		}
	}
	if only["FROM"] != "scratch" {
		t.Errorf("last stage is from %q; want scratch", only["FROM"])
	}
	if !regexp.MustCompile(`^[1-9]\d*:[1-9]\d*$`).MatchString(only["USER"]) {
		t.Errorf("USER %q; want a user and a group by number, neither root", only["USER"])
	}
	command := append(words(t, only["ENTRYPOINT"]), words(t, only["CMD"])...)
	want := []string{"/usr/bin/heatreeve", "run", "--site", "/etc/heatreeve/site.yaml", "--data", only["VOLUME"], "--listen", ":" + only["EXPOSE"], "--web-config", "/etc/heatreeve/web.yaml"}
	if !slices.Equal(command, want) {
		t.Errorf("the container runs %q; want %q", command, want)
	}
	// Without the folder in the image a fresh volume would belong to root.
	if !slices.ContainsFunc(stage, func(in instruction) bool {
		return in.name == "COPY" && strings.Contains(in.rest, "--chown="+only["USER"]+" ") && strings.HasSuffix(in.rest, " "+path.Clean(only["VOLUME"]))
	}) {
		t.Errorf("no COPY gives %s to %s", only["VOLUME"], only["USER"])
	}
}

// words reads the JSON form of ENTRYPOINT and CMD, the only one that needs no shell.
func words(t *testing.T, list string) []string {
	t.Helper()
	var w []string
	if err := json.Unmarshal([]byte(list), &w); err != nil || len(w) == 0 {
		t.Errorf("%q is not a JSON list of words: %v", list, err)
	}
	return w
}
