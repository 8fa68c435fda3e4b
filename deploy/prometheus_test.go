package deploy

import (
	"bytes"
	"io"
	"maps"
	"regexp"
	"slices"
	"strings"
	"testing"

	"go.yaml.in/yaml/v3"

	"heatreeve/agent/design"
)

// metrics are the names that the rules may build on, each with its own labels; the agent's other metrics are not needed
// here. A scrape adds job and instance.
var metrics = map[string][]string{
	"heatreeve_broker_connected":              {},
	"heatreeve_history_commit_failures_total": {},
	"heatreeve_load_coverage_ratio":           {"load", "window"},
	"heatreeve_load_deviation_watts":          {"load"},
	"heatreeve_load_expected_duty_watts":      {"load"},
	"heatreeve_load_quality":                  {"load", "quality"},
	"heatreeve_load_time_seconds_total":       {"load", "kind"},
	"heatreeve_load_verdict":                  {"load", "verdict"},
	"heatreeve_tag_max_age_seconds":           {"tag"},
	"heatreeve_tag_reading_timestamp_seconds": {"tag"},
	"heatreeve_tag_readings_total":            {"tag"},
	"heatreeve_tag_refused_total":             {"tag", "reason"},
	"heatreeve_warning_acknowledged":          {"subject", "kind"},
	"heatreeve_warning_active":                {"subject", "kind"},
	"heatreeve_warning_shelved":               {"subject", "kind"},

	"heatreeve_exchanger_clean_conductance_watts_per_kelvin": {"exchanger"},
	"heatreeve_exchanger_closure_uncertainty_watts":          {"exchanger"},
	"heatreeve_exchanger_closure_watts":                      {"exchanger"},
	"heatreeve_exchanger_conductance_watts_per_kelvin":       {"exchanger"},
}

var (
	selector = regexp.MustCompile(`\b(heatreeve_[a-z_]+)(?:\{([^}]*)\})?`)
	matcher  = regexp.MustCompile(`([a-z_]+)\s*=`)
)

// checkSelectors wants every metric in text to be one of the agent's, asked for by labels that it has.
func checkSelectors(t *testing.T, text string) {
	t.Helper()
	for _, m := range selector.FindAllStringSubmatch(text, -1) {
		labels, ok := metrics[m[1]]
		if !ok {
			t.Errorf("%s is not a metric of the agent", m[1])
		}
		for _, l := range matcher.FindAllStringSubmatch(m[2], -1) {
			if !slices.Contains(append([]string{"job", "instance"}, labels...), l[1]) {
				t.Errorf("%s has no label %q", m[0], l[1])
			}
		}
	}
}

type rule struct {
	Alert       string
	Expr        string
	For         string
	KeepFiring  string `yaml:"keep_firing_for"`
	Labels      map[string]string
	Annotations map[string]string
	group       string
}

func decode(t *testing.T, file string, into any) {
	t.Helper()
	d := yaml.NewDecoder(strings.NewReader(read(t, file)))
	d.KnownFields(true)
	if err := d.Decode(into); err != nil {
		t.Fatalf("%s: %v", file, err)
	}
	if err := d.Decode(new(any)); err != io.EOF {
		t.Fatalf("%s: a second document: %v", file, err)
	}
}

func readRules(t *testing.T, file string) []rule {
	t.Helper()
	var f struct {
		Groups []struct {
			Name  string
			Rules []rule
		}
	}
	decode(t, file, &f)
	var all []rule
	for _, g := range f.Groups {
		for _, r := range g.Rules {
			r.group = g.Name
			all = append(all, r)
		}
	}
	return all
}

// groups are the alerts by what they are about.
var groups = map[string][]string{
	"heatreeve-verdict":  {"HeatreeveDutyShort", "HeatreeveDutyOver", "HeatreeveDutyDrifting", "HeatreeveExchangerFouling", "HeatreeveExchangerUnbalanced"},
	"heatreeve-readings": {"HeatreeveTagStale", "HeatreeveTagNeverRead", "HeatreeveLoadBlind", "HeatreeveLoadUncertain"},
	"heatreeve-agent":    {"HeatreeveAgentDown", "HeatreeveBrokerGone", "HeatreeveHistoryFailing"},
	"heatreeve-accounts": {"HeatreeveCoverageLow"},
}

func checkRules(t *testing.T, file string) {
	got := map[string][]string{}
	for _, r := range readRules(t, file) {
		got[r.group] = append(got[r.group], r.Alert)
		checkRule(t, r)
	}
	if !maps.EqualFunc(got, groups, slices.Equal) {
		t.Errorf("alerts %q; want %q", got, groups)
	}
	checkKinds(t, file)
}

func checkRule(t *testing.T, r rule) {
	checkSelectors(t, r.Expr)
	if !slices.Contains([]string{"critical", "warning", "info"}, r.Labels["severity"]) {
		t.Errorf("%s has severity %q", r.Alert, r.Labels["severity"])
	}
	if r.For == "" || r.KeepFiring == "" {
		t.Errorf("%s waits for %q and stays for %q; want both", r.Alert, r.For, r.KeepFiring)
	}
	checkSelectors(t, r.Annotations["summary"]+r.Annotations["description"])
	if !strings.Contains(r.Annotations["description"], "Look first at") {
		t.Errorf("%s does not say what to look at first", r.Alert)
	}
	if got, want := r.Annotations["runbook_url"], "{{ $externalURL }}/user/runbook.md#"+r.Alert; got != want {
		t.Errorf("%s: runbook_url %q; want %q", r.Alert, got, want)
	}
	for expr, label := range map[string]string{"heatreeve_load_": "load", "heatreeve_tag_": "tag", "heatreeve_warning_": "subject"} {
		if strings.Contains(r.Expr, expr) && !strings.Contains(r.Annotations["summary"], "$labels."+label) {
			t.Errorf("the summary of %s does not name the %s", r.Alert, label)
		}
	}
}

// checkKinds wants one alert for each kind of warning, and each to leave out what is shelved.
func checkKinds(t *testing.T, file string) {
	told := map[design.Kind]int{}
	for _, r := range readRules(t, file) {
		kind, rest, ok := strings.Cut(strings.TrimPrefix(r.Expr, `heatreeve_warning_active{kind="`), `"} == 1`)
		if !ok || r.group != "heatreeve-verdict" {
			continue
		}
		told[design.Kind(kind)]++
		if want := " unless on (job, instance, subject, kind) heatreeve_warning_shelved == 1"; rest != want {
			t.Errorf("%s goes on with %q; want %q", r.Alert, rest, want)
		}
	}
	for _, k := range design.Kinds() {
		if told[k] != 1 {
			t.Errorf("%d alerts on warnings of kind %s; want one", told[k], k)
		}
	}
}

// checkRuleCases wants each alert to have a case in which it fires and one in which it does not, on series that have
// exactly the agent's labels. That the cases hold is for promtool to say.
func checkRuleCases(t *testing.T, file string) {
	var f struct {
		RuleFiles          []string `yaml:"rule_files"`
		EvaluationInterval string   `yaml:"evaluation_interval"`
		Tests              []struct {
			Name        string
			Interval    string
			ExternalURL string                            `yaml:"external_url"`
			InputSeries []struct{ Series, Values string } `yaml:"input_series"`
			Cases       []struct {
				EvalTime  string `yaml:"eval_time"`
				Alertname string
				Want      []map[string]any `yaml:"exp_alerts"`
			} `yaml:"alert_rule_test"`
		}
	}
	decode(t, file, &f)
	fires, quiet := map[string]bool{}, map[string]bool{}
	for _, test := range f.Tests {
		for _, s := range test.InputSeries {
			checkFullSeries(t, s.Series)
		}
		for _, c := range test.Cases {
			fires[c.Alertname] = fires[c.Alertname] || len(c.Want) > 0
			quiet[c.Alertname] = quiet[c.Alertname] || len(c.Want) == 0
		}
	}
	for _, r := range readRules(t, "prometheus/heatreeve.rules.yml") {
		if !fires[r.Alert] || !quiet[r.Alert] {
			t.Errorf("%s: a case that fires %v, one that does not %v; want both", r.Alert, fires[r.Alert], quiet[r.Alert])
		}
	}
}

func checkFullSeries(t *testing.T, series string) {
	t.Helper()
	name, rest, _ := strings.Cut(series, "{")
	var got []string
	for _, l := range matcher.FindAllStringSubmatch(rest, -1) {
		got = append(got, l[1])
	}
	want := append([]string{"job", "instance"}, metrics[name]...)
	if _, ok := metrics[name]; !ok && name != "up" || !slices.Equal(got, want) {
		t.Errorf("series %s: want a metric of the agent with the labels %q", series, want)
	}
}

func checkScrapeConfig(t *testing.T, file string) {
	var f struct {
		Global struct {
			Scrape   string `yaml:"scrape_interval"`
			Timeout  string `yaml:"scrape_timeout"`
			Evaluate string `yaml:"evaluation_interval"`
		}
		RuleFiles []string `yaml:"rule_files"`
		Scrape    []struct {
			Job    string                       `yaml:"job_name"`
			Static []struct{ Targets []string } `yaml:"static_configs"`
		} `yaml:"scrape_configs"`
	}
	decode(t, file, &f)
	if len(f.Scrape) != 1 || f.Scrape[0].Job != "heatreeve" {
		t.Fatalf("scrape configs %+v; want the one job heatreeve that the rules look for", f.Scrape)
	}
	command := parseUnit(t, read(t, "systemd/heatreeve.service")).execStart()
	listen := command[len(command)-1]
	if got := f.Scrape[0].Static[0].Targets; !slices.Equal(got, []string{listen}) {
		t.Errorf("target %q; the service listens on %q", got, listen)
	}
	for _, rules := range f.RuleFiles {
		if !bytes.Contains([]byte(read(t, "prometheus/"+rules)), []byte("alert:")) {
			t.Errorf("rule file %s holds no alert", rules)
		}
	}
}
