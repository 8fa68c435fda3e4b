package main

import (
	"os"
	"regexp"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/prometheus/client_golang/prometheus"

	"heatreeve/agent"
	"heatreeve/agent/design/cause"
	"heatreeve/agent/metrics"
	"heatreeve/agent/site"
	"heatreeve/configs"
	"heatreeve/ingest"
	"heatreeve/ingest/quality"
)

func readme(t *testing.T) string {
	t.Helper()
	text, err := os.ReadFile("../../../README.md")
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}

// The metrics that the README names are those that there are.
func TestReadmeNamesTheMetrics(t *testing.T) {
	descs := make(chan *prometheus.Desc, 100)
	metrics.NewCollector(nil, nil).Describe(descs)
	metrics.BuildInfo("").Describe(descs)
	metrics.CommitSeconds().Describe(descs)
	metrics.NewDoors().Describe(descs)
	close(descs)
	name := regexp.MustCompile(`fqName: "(\w+)"`)
	var have []string
	for d := range descs {
		have = append(have, name.FindStringSubmatch(d.String())[1])
	}
	said := regexp.MustCompile("`(heatreeve_[a-z_]+)`").FindAllStringSubmatch(readme(t), -1)
	var want []string
	for _, m := range said {
		want = append(want, m[1])
	}
	slices.Sort(have)
	slices.Sort(want)
	want = slices.Compact(want)
	if !slices.Equal(have, want) {
		t.Errorf("the program has %v,\nthe README names %v", have, want)
	}
}

// The site file in the README is good, and is the demo's in short.
func TestReadmeSiteFileIsGood(t *testing.T) {
	_, rest, ok := strings.Cut(readme(t), "```yaml\n")
	text, _, closed := strings.Cut(rest, "```")
	if !ok || !closed {
		t.Fatal("the README shows no site file")
	}
	s, err := site.Parse("README.md", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	demo, err := site.Parse(configs.DemoName, configs.Demo)
	if err != nil {
		t.Fatal(err)
	}
	if s.Name != demo.Name || s.Loads[0].Name != demo.Loads[0].Name || s.Loads[0].Design.Duty != demo.Loads[0].Design.Duty {
		t.Errorf("README shows %q with %q, the demo's file is %q with %q", s.Name, s.Loads[0].Name, demo.Name, demo.Loads[0].Name)
	}
}

// So are the counters, vessels and corrections that it shows further down.
func TestReadmeShowsGoodCounters(t *testing.T) {
	_, rest, ok := strings.Cut(readme(t), "### Counters, changes, vessels, corrections\n\n```yaml\n")
	text, words, closed := strings.Cut(rest, "```")
	if !ok || !closed {
		t.Fatal("the README shows no counters")
	}
	s, err := site.Parse("README.md", []byte("site: A\ntimezone: UTC\nbroker: {url: mqtt://127.0.0.1}\n"+text))
	if err != nil {
		t.Fatal(err)
	}
	if len(s.Loads) != 2 || s.Loads[1].Vessel == nil || len(s.Tags)-s.Declared() != 2 {
		t.Errorf("the README shows %d loads and %d tags", len(s.Loads), len(s.Tags))
	}
	words, _, _ = strings.Cut(words, "\n### ")
	for _, block := range []string{"tags.*.alive", "tags.*.counts", "loads.*.stream.corrections", "loads.*.stream.corrections.stored"} {
		for _, key := range site.Keys()[block] {
			if !strings.Contains(text+words, "`"+key) && !strings.Contains(text+words, key+":") {
				t.Errorf("the README says nothing of %s.%s", block, key)
			}
		}
	}
}

// And the payloads and raw signals.
func TestReadmeShowsGoodPayloads(t *testing.T) {
	_, rest, ok := strings.Cut(readme(t), "### Payloads and raw signals\n\n```yaml\n")
	text, words, closed := strings.Cut(rest, "```")
	if !ok || !closed {
		t.Fatal("the README shows no payloads")
	}
	s, err := site.Parse("README.md", []byte("site: A\ntimezone: UTC\nbarometer: 100 kPa\nbroker: {url: mqtt://127.0.0.1}\n"+text))
	if err != nil {
		t.Fatal(err)
	}
	if len(s.Tags) != 7 || s.Loads[0].Stream.CalibratedAt != 965 {
		t.Errorf("the README shows %d tags and %+v", len(s.Tags), s.Loads[0].Stream)
	}
	words, _, _ = strings.Cut(words, "\n### ")
	for _, key := range append([]string{"quality", "unit_at", "samples", "step", "signal", "lead", "differential", "cut_off"}, site.Keys()["tags.*.quality"]...) {
		if !strings.Contains(text+words, "`"+key) && !strings.Contains(text+words, key+":") {
			t.Errorf("the README says nothing of %s", key)
		}
	}
}

// And the tests on signals.
func TestReadmeShowsGoodTests(t *testing.T) {
	_, rest, ok := strings.Cut(readme(t), "### Tests on signals, and quality\n\n```yaml\n")
	text, words, closed := strings.Cut(rest, "```")
	if !ok || !closed {
		t.Fatal("the README shows no tests on signals")
	}
	s, err := site.Parse("README.md", []byte("site: A\ntimezone: UTC\nbarometer: 100 kPa\nbroker: {url: mqtt://127.0.0.1}\n"+text))
	if err != nil {
		t.Fatal(err)
	}
	want := site.Screen{Low: 278.15, High: 368.15, Fastest: 2, Stuck: 30 * time.Minute, Spikes: true}
	if tag := s.Tags[0]; *tag.Screen != want || !tag.HasBeside || s.Tags[tag.Beside].Name != "TT-1B" {
		t.Errorf("the README shows %+v beside %d", *tag.Screen, tag.Beside)
	}
	if l := s.Loads[0]; !l.HasRunning || s.Tags[l.Running.Tag].Name != "P-1" {
		t.Errorf("the README shows %+v", l)
	}
	words, _, _ = strings.Cut(words, "\n### ")
	for _, m := range quality.Marks() {
		if !strings.Contains(words, "`"+m.String()+"`") {
			t.Errorf("the README says nothing of readings that are %q", m)
		}
	}
	for _, key := range []string{"plausible", "fastest", "stuck", "spikes", "beside", "running", "bypass", "both_ways"} {
		if !strings.Contains(words, "`"+key) {
			t.Errorf("the README says nothing of %s", key)
		}
	}
}

// The reasons to refuse a message that the README lists are those that there are.
func TestReadmeNamesTheReasons(t *testing.T) {
	_, rest, ok := strings.Cut(readme(t), "The reasons: ")
	list, _, closed := strings.Cut(rest, "\n\n")
	if !ok || !closed {
		t.Fatal("the README lists no reasons")
	}
	var said, have []string
	for _, m := range regexp.MustCompile("`([a-z-]+)`").FindAllStringSubmatch(list, -1) {
		said = append(said, m[1])
	}
	for _, r := range ingest.Reasons() {
		have = append(have, r.String())
	}
	have = append(have, "crowded") // the engine's own
	if !slices.Equal(said, have) {
		t.Errorf("the program has %v,\nthe README lists %v", have, said)
	}
}

// The commands and the address in the README are those of the program, and the
// safety line stands in it.
func TestReadmeAgreesWithTheProgram(t *testing.T) {
	text := readme(t)
	flat := strings.Join(strings.Fields(strings.ReplaceAll(text, "> ", "")), " ")
	for _, want := range []string{"`" + defaultListen + "`", strings.Join(strings.Fields(agent.Safety), " ")} {
		if !strings.Contains(flat, want) {
			t.Errorf("the README does not say %q", want)
		}
	}
	known := make(map[string]bool)
	for _, c := range commands {
		known[c.name] = true
	}
	for _, m := range regexp.MustCompile("`heatreeve (\\w+)").FindAllStringSubmatch(text, -1) {
		if !known[m[1]] {
			t.Errorf("the README names the command %q", m[1])
		}
	}
	for _, path := range regexp.MustCompile(`\]\(([^)#]+)\)`).FindAllStringSubmatch(text, -1) {
		if _, err := os.Stat("../../../" + path[1]); err != nil {
			t.Errorf("the README points at %q, which is not there", path[1])
		}
	}
}

// The commands that the README shows with their output print just that.
func TestReadmeTranscripts(t *testing.T) {
	ran := 0
	for i, block := range strings.Split(readme(t), "```") {
		if i%2 == 0 || !strings.HasPrefix(block, "\n$ heatreeve ") {
			continue
		}
		for _, session := range strings.Split(block, "\n$ heatreeve ")[1:] {
			line, want, _ := strings.Cut(session, "\n")
			status, out, errs := invoke(inHistory(t, words(line))...)
			out = strings.ReplaceAll(out, "\r\n", "\n") // of csv
			if status != exitGood || errs != "" || strings.TrimSpace(out) != strings.TrimSpace(want) {
				t.Errorf("heatreeve %s: status %d, %s, prints\n%s\nthe README shows\n%s", line, status, errs, out, want)
			}
			ran++
		}
	}
	if ran < 3 {
		t.Errorf("%d commands with their output, want 3 or more", ran)
	}
}

// words parts a line as a shell does that knows single quotes.
func words(line string) []string {
	var all []string
	for i, part := range strings.Split(line, "'") {
		if i%2 == 1 {
			all = append(all, part)
			continue
		}
		all = append(all, strings.Fields(part)...)
	}
	return all
}

// The fluids that the README declares are fluids.
func TestReadmeFluidsAreGood(t *testing.T) {
	_, rest, ok := strings.Cut(readme(t), "### Fluids")
	section, _, closed := strings.Cut(rest, "\n## ")
	if !ok || !closed {
		t.Fatal("the README has no section on fluids")
	}
	declared := regexp.MustCompile("`(\\{[^`]+\\})`").FindAllStringSubmatch(section, -1)
	if len(declared) < 8 {
		t.Errorf("%d declarations, want 8 or more", len(declared))
	}
	for _, m := range declared {
		if text := strings.Replace(m[1], ", ...", ", [200 °C, 2.5 kJ/(kg K), 751 kg/m3]", 1); !good(text) {
			_, err := site.ParseFluid(text)
			t.Errorf("%s: %v", text, err)
		}
	}
	for _, m := range regexp.MustCompile(`\*\*Fluids\*\* that have a name[^.]*\.`).FindAllString(readme(t), -1) {
		for _, name := range regexp.MustCompile("`([^`]+)`").FindAllStringSubmatch(m, -1) {
			if !good(name[1]) {
				t.Errorf("the README names %q, which is no fluid", name[1])
			}
		}
	}
}

func good(fluid string) bool {
	_, err := site.ParseFluid(fluid)
	return err == nil
}

// The causes that the README tells are those that there are.
func TestReadmeCauses(t *testing.T) {
	var have []string
	for _, k := range cause.Kinds() {
		have = append(have, string(k))
	}
	text := strings.Join(strings.Fields(readme(t)), " ")
	if want := "There are: " + strings.Join(have, " · ") + ". "; !strings.Contains(text, want) {
		t.Errorf("the README does not say %q", want)
	}
}
