//go:build services

package deploy

import (
	"encoding/json"
	"fmt"
	"io"
	"net/http"
	"net/http/httptest"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

func TestPromtoolTakesTheFiles(t *testing.T) {
	must(t, "promtool", "check", "config", "prometheus/prometheus.yml")
	must(t, "promtool", "check", "rules", "--lint=all", "--lint-fatal", "prometheus/heatreeve.rules.yml")
	must(t, "promtool", "test", "rules", "prometheus/heatreeve.rules.test.yml")
}

// writePrometheus copies the files with pairs put into the rules.
func writePrometheus(t *testing.T, pairs ...string) string {
	t.Helper()
	dir := t.TempDir()
	for _, file := range []string{"prometheus.yml", "heatreeve.rules.yml", "heatreeve.rules.test.yml"} {
		text := read(t, "prometheus/"+file)
		if file == "heatreeve.rules.yml" {
			text = moved(t, text, pairs...)
		}
		if err := os.WriteFile(filepath.Join(dir, file), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	return dir
}

// TestCasesHoldTheRules spoils one condition at a time; the cases must notice.
func TestCasesHoldTheRules(t *testing.T) {
	for _, spoilt := range [][2]string{
		{`up{job="heatreeve"} == 0 or absent(up{job="heatreeve"})`, `up == 0 or absent(up{job="heatreeve"})`},
		{` or absent(up{job="heatreeve"})`, ``},
		{`heatreeve_broker_connected == 0`, `heatreeve_broker_connected >= 0`},
		{`clamp_min(heatreeve_tag_max_age_seconds, 300)`, `clamp_min(heatreeve_tag_max_age_seconds, 180)`},
		{`clamp_min(heatreeve_tag_max_age_seconds, 300)`, `300`},
		{`and on (job, instance) heatreeve_broker_connected == 1`, `and on (job, instance) heatreeve_broker_connected >= 0`},
		{`_timestamp_seconds > 0`, `_timestamp_seconds > 1e9`},
		{`verdict="blind"`, `verdict=~"blind|idle"`},
		{`active{kind="short"}`, `active{kind=~"short|over"}`},
		{`active{kind="over"}`, `active`},
		{`active{kind="drifting"} == 1`, `active{kind="drifting"} >= 0`},
		{`active{kind="fouling"}`, `active{kind="unbalanced"}`},
		{`active{kind="unbalanced"}`, `active{kind="fouling"}`},
		{`shelved == 1`, `shelved >= 0`},
		{`shelved == 1`, `shelved > 1`},
		{`unless on (job, instance, subject, kind)`, `unless on (job, instance, subject)`},
		{`unless on (job, instance, subject, kind)`, `unless on (subject, kind)`},
		{`unless on (job, instance, subject, kind)`, `unless on (job, instance, kind)`},
		{`acknowledged{job=%q,instance=%q,subject=%q,kind=%q} == 1`, `acknowledged{job=%q,instance=%q,subject=%q,kind=%q} >= 0`},
		{`runbook.md#`, `runbook.md`},
		{`window="1h"`, `window=~"1h|1m"`},
		{`< 0.9`, `< 0.91`},
		{`> 3600`, `> 36`},
		{`keep_firing_for: 10m`, `keep_firing_for: 1s`},
		{`total[5m]) > 0`, `total[5m]) >= 0`},
		{`total[5m]) > 0`, `total[30m]) > 0`},
		{`keep_firing_for: 2m`, `keep_firing_for: 1s`},
		{`keep_firing_for: 2m`, `keep_firing_for: 20m`},
		{`        for: 1m`, `        for: 0s`},
		{`for: 5m`, `for: 0s`},
		{`for: 10m`, `for: 0s`},
		{`for: 2m`, `for: 0s`},
	} {
		dir := writePrometheus(t, spoilt[0], spoilt[1])
		if out, err := output(t, "promtool", "test", "rules", filepath.Join(dir, "heatreeve.rules.test.yml")); err == nil {
			t.Errorf("%q instead of %q: the cases still pass\n%s", spoilt[1], spoilt[0], out)
		}
	}
}

// scrape is what an agent might answer that warns of two loads, one of them shelved, and of an exchanger.
const scrape = `# TYPE heatreeve_broker_connected gauge
heatreeve_broker_connected 1
# TYPE heatreeve_warning_active gauge
heatreeve_warning_active{subject="hot-water",kind="short"} 1
heatreeve_warning_active{subject="hot-water",kind="drifting"} 0
heatreeve_warning_active{subject="glycol",kind="short"} 1
heatreeve_warning_active{subject="plates",kind="fouling"} 1
# TYPE heatreeve_warning_shelved gauge
heatreeve_warning_shelved{subject="hot-water",kind="short"} 0
heatreeve_warning_shelved{subject="glycol",kind="short"} 1
heatreeve_warning_shelved{subject="plates",kind="unbalanced"} 1
`

// TestPrometheusRunsTheFiles starts the server itself: it scrapes the target, loads each rule in good health, and holds
// the alerts on what is in trouble and not shelved, and no other.
func TestPrometheusRunsTheFiles(t *testing.T) {
	agent := httptest.NewServer(http.HandlerFunc(func(w http.ResponseWriter, _ *http.Request) {
		w.Header().Set("Content-Type", "text/plain; version=0.0.4")
		_, _ = io.WriteString(w, scrape)
	}))
	defer agent.Close()
	dir := writePrometheus(t)
	config := moved(t, read(t, "prometheus/prometheus.yml"),
		"127.0.0.1:9617", strings.TrimPrefix(agent.URL, "http://"), "interval: 15s", "interval: 1s", "timeout: 10s", "timeout: 1s")
	if err := os.WriteFile(filepath.Join(dir, "prometheus.yml"), []byte(config), 0o644); err != nil {
		t.Fatal(err)
	}
	address := "127.0.0.1:" + freePort(t)
	server := start(t, exec.Command(program(t, "prometheus"), "--config.file="+filepath.Join(dir, "prometheus.yml"),
		"--storage.tsdb.path="+filepath.Join(dir, "data"), "--web.listen-address="+address))

	want := []string{"HeatreeveDutyShort hot-water pending", "HeatreeveExchangerFouling plates pending"}
	server.eventually(t, func() error {
		got, err := alerts(address)
		if err == nil && !slices.Equal(got, want) {
			err = fmt.Errorf("alerts %q; want %q", got, want)
		}
		return err
	})
	server.eventually(t, func() error { return rulesHealthy(address, len(readRules(t, "prometheus/heatreeve.rules.yml"))) })
}

// ask reads the data of one answer of the server's HTTP interface.
func ask(address, path string, data any) error {
	r, err := http.Get("http://" + address + path)
	if err != nil {
		return err
	}
	defer r.Body.Close()
	return json.NewDecoder(r.Body).Decode(&struct{ Data any }{data})
}

func alerts(address string) ([]string, error) {
	var data struct {
		Alerts []struct {
			Labels map[string]string
			State  string
		}
	}
	err := ask(address, "/api/v1/alerts", &data)
	var all []string
	for _, a := range data.Alerts {
		all = append(all, a.Labels["alertname"]+" "+a.Labels["subject"]+" "+a.State)
	}
	slices.Sort(all)
	return all, err
}

func rulesHealthy(address string, want int) error {
	var data struct {
		Groups []struct {
			Rules []struct{ Name, Health, LastError string }
		}
	}
	if err := ask(address, "/api/v1/rules", &data); err != nil {
		return err
	}
	n := 0
	for _, g := range data.Groups {
		for _, r := range g.Rules {
			if r.Health != "ok" {
				return fmt.Errorf("rule %s: %s %s", r.Name, r.Health, r.LastError)
			}
			n++
		}
	}
	if n != want {
		return fmt.Errorf("%d rules in the server; want %d", n, want)
	}
	return nil
}
