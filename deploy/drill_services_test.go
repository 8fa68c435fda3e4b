//go:build services

package deploy

import (
	"fmt"
	"math"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// TestDrill breaks a plant in every way that the rules tell of, and mends it; the real agent and the real Prometheus see
// each alert fire and clear.
func TestDrill(t *testing.T) {
	d := startDrill(t)
	d.yesterday(t)
	d.rulesStandOnMetrics(t)
	d.runbookIsAtHand(t)
	d.today(t)
	d.machine(t)
}

// rulesStandOnMetrics wants the agent to have every metric of the rules, and each rule to be in good health.
func (d *drill) rulesStandOnMetrics(t *testing.T) {
	t.Helper()
	body, err := get("http://" + d.listen + "/metrics")
	if err != nil {
		t.Fatal(err)
	}
	for name := range metrics {
		if name != "heatreeve_tag_refused_total" && !strings.Contains(body, "\n"+name) { // nothing was refused here
			t.Errorf("the agent exposes no %s", name)
		}
	}
	d.prometheus.eventually(t, func() error { return rulesHealthy(d.address, len(readRules(t, "prometheus/heatreeve.rules.yml"))) })
}

// runbookIsAtHand follows the link of every alert that fires to its section.
func (d *drill) runbookIsAtHand(t *testing.T) {
	t.Helper()
	d.until(t, still, "HeatreeveTagNeverRead FN", true)
	all, err := d.firing()
	if err != nil {
		t.Fatal(err)
	}
	for name, a := range all {
		page, anchor, _ := strings.Cut(a.Annotations["runbook_url"], "#")
		body, err := get(page)
		if err != nil || !strings.Contains(body, `<a id="`+anchor+`"></a>`+"\n## "+a.Labels["alertname"]+"\n") {
			t.Errorf("%s: %q leads to no section: %v", name, a.Annotations["runbook_url"], err)
		}
	}
}

// yesterday runs the plant through hours of event time: what the agent finds in many minutes.
func (d *drill) yesterday(t *testing.T) {
	d.stamp = time.Now().Add(-9 * time.Hour).Truncate(time.Minute)
	d.through(t, 75*time.Minute) // as long as monitors learn how windows scatter
	set := func(factor float64, tags ...string) func() {
		return func() {
			for _, tag := range tags {
				d.values[tag] *= factor
			}
		}
	}
	d.both(t, fast, "HeatreeveDutyDrifting circuit", set(1.06, "FT", "FC"), d.healthy)
	// Four kelvins more between the sides at the same duty: a sixth of the conductance is gone.
	d.both(t, fast, "HeatreeveExchangerFouling plates", func() { d.values["TI"] += 4; d.values["TO"] += 4 }, d.healthy)
	d.both(t, fast, "HeatreeveExchangerUnbalanced plates", set(1.1, "FC"), d.healthy)
	set(0.8, "FT", "FC")()
	d.until(t, fast, "HeatreeveDutyShort circuit", true)
	d.marks(t, "HeatreeveDutyShort circuit")
	d.healthy()
	d.until(t, fast, "HeatreeveDutyShort circuit", false)
	d.both(t, fast, "HeatreeveDutyOver circuit", set(1.2, "FT", "FC"), d.healthy)
}

// marks acknowledges and shelves the warning that an alert is on. Acknowledged it goes on and says so, shelved it does not fire,
// and when the shelf is taken back it does again.
func (d *drill) marks(t *testing.T, name string) {
	t.Helper()
	mark := func(args ...string) {
		must(t, native(t), append(args, "--kind", "short", "--data", filepath.Join(d.dir, "state"), "--by", "N. Shift", "--reason", "a drill")...)
	}
	mark("acknowledge", "circuit")
	due := time.Now()
	d.prometheus.eventually(t, func() error {
		d.goOn(t, fast, &due)
		all, err := d.firing()
		if a := all[name]; err == nil && !strings.HasPrefix(a.Annotations["description"], "Acknowledged. circuit is off by -") {
			err = fmt.Errorf("%s: %q does not begin by telling that it is acknowledged", name, a.Annotations["description"])
		}
		return err
	})
	mark("shelve", "circuit", "--for", "24h")
	d.until(t, fast, name, false)
	mark("shelve", "circuit", "--end")
	d.until(t, fast, name, true)
}

// through runs the plant over a length of its time.
func (d *drill) through(t *testing.T, length time.Duration) {
	t.Helper()
	for range int(length / step) {
		d.run(t)
	}
}

// lastHour leaves a hole of nearly seven minutes at the start of the hour before now, so that more than six of it are in the
// hour for a while yet. Before and after it the plant runs.
func (d *drill) lastHour(t *testing.T) {
	t.Helper()
	const hole = 6*time.Minute + 50*time.Second
	start := time.Now().Add(-time.Hour)
	d.through(t, start.Sub(d.stamp))
	d.stamp = start.Add(hole)
	d.through(t, time.Since(d.stamp))
	for time.Since(d.stamp) > step { // what went by meanwhile
		d.run(t)
	}
}

// today runs the plant at its own pace: what the agent finds now.
func (d *drill) today(t *testing.T) {
	d.until(t, still, "HeatreeveTagNeverRead FN", true)
	d.until(t, still, "HeatreeveLoadBlind spare", true)
	d.lastHour(t)
	d.until(t, live, "HeatreeveLoadBlind circuit", false) // the agent has come to the present
	d.until(t, live, "HeatreeveTagStale TO", false)
	d.until(t, live, "HeatreeveCoverageLow circuit", true)
	d.until(t, live, "HeatreeveCoverageLow circuit", false)
	d.both(t, live, "HeatreeveLoadUncertain circuit", func() { d.quality = "held" }, d.healthy)
	delete(d.silent, "FN")
	d.until(t, live, "HeatreeveTagNeverRead FN", false)
	d.until(t, live, "HeatreeveLoadBlind spare", false)
	d.silent["TO"] = true
	d.until(t, live, "HeatreeveTagStale TO", true)
	d.until(t, live, "HeatreeveLoadBlind circuit", true)
	delete(d.silent, "TO")
	d.until(t, live, "HeatreeveTagStale TO", false)
	d.until(t, live, "HeatreeveLoadBlind circuit", false)
}

// machine takes disk, broker and agent away.
func (d *drill) machine(t *testing.T) {
	d.both(t, live, "HeatreeveHistoryFailing", func() { d.fileSize(t, 0) }, func() { d.fileSize(t, math.MaxUint64) })
	d.both(t, still, "HeatreeveBrokerGone", func() { d.broker.stop(t) }, func() { d.broker.run(t) })
	d.both(t, still, "HeatreeveAgentDown", func() { d.agent.stop(t) }, func() {
		d.agent = start(t, exec.Command(d.agent.cmd.Path, d.agent.cmd.Args[1:]...))
	})
}
