package agent_test

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/prometheus/common/expfmt"
	"github.com/prometheus/common/model"
	"go.uber.org/goleak"

	"heatreeve/agent"
	"heatreeve/agent/answer"
	"heatreeve/agent/demo"
	"heatreeve/agent/view"
)

func TestMain(m *testing.M) { goleak.VerifyTestMain(m) }

// running is an agent on the demo's plant.
type running struct {
	address   string
	snapshots chan *view.Snapshot
	stop      func() error
}

func start(t *testing.T, d *demo.Demo, data string) *running {
	t.Helper()
	r := &running{snapshots: make(chan *view.Snapshot, 1)}
	ready := make(chan net.Addr, 1)
	a, err := agent.New(d.Site, agent.Options{
		Data: data, Listen: "127.0.0.1:0", Version: "test", Log: slog.New(slog.DiscardHandler), Now: d.Clock.Now,
		Ready: func(at net.Addr) { ready <- at },
		Beat: func(s *view.Snapshot) {
			select {
			case r.snapshots <- s:
			default: // the test looks at one now and then
			}
		},
	})
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	ended := make(chan error, 1)
	go func() { ended <- a.Run(ctx) }()
	r.stop = func() error { cancel(); return <-ended }
	select {
	case at := <-ready:
		r.address = at.String()
	case err := <-ended:
		t.Fatal(err)
	}
	return r
}

// await returns the first snapshot that f is content with.
func (r *running) await(t *testing.T, what string, f func(*view.Snapshot) bool) *view.Snapshot {
	t.Helper()
	deadline := time.After(30 * time.Second)
	for {
		select {
		case s := <-r.snapshots:
			if f(s) {
				return s
			}
		case <-deadline:
			t.Fatalf("waited 30 s for: %s", what)
		}
	}
}

// metric returns a sample of the metrics page that has the given label values.
func (r *running) metric(t *testing.T, name string, labels ...string) (float64, error) {
	t.Helper()
	client := &http.Client{Transport: &http.Transport{DisableKeepAlives: true}, Timeout: 5 * time.Second}
	resp, err := client.Get("http://" + r.address + "/metrics")
	if err != nil {
		return 0, err
	}
	defer resp.Body.Close()
	parser := expfmt.NewTextParser(model.UTF8Validation)
	families, err := parser.TextToMetricFamilies(resp.Body)
	if err != nil {
		return 0, err
	}
	for _, m := range families[name].GetMetric() {
		var values []string
		for _, l := range m.GetLabel() {
			values = append(values, l.GetValue())
		}
		if strings.Join(values, ",") == strings.Join(labels, ",") {
			return m.GetGauge().GetValue() + m.GetCounter().GetValue(), nil
		}
	}
	return 0, fmt.Errorf("no %s%v", name, labels)
}

// The agent on the demo's plant shows the duties that the plant truly moves,
// within twice their uncertainty, books them, and goes on from its registers when
// it is started again on the same data.
func TestDemoPlantAndRestart(t *testing.T) {
	data := t.TempDir()
	first := session(t, data, 0)
	if first == 0 {
		t.Fatal("no heat was booked")
	}
	before, err := agent.EventTime(data)
	if err != nil || before.IsZero() {
		t.Fatalf("event time %v, %v", before, err)
	}
	checkEvents(t, data, "started stopped")
	if second := session(t, data, first); second <= first {
		t.Errorf("hot water ends at %g J after a restart, began at %g J", second, first)
	}
	checkEvents(t, data, "started started stopped stopped")
}

// checkEvents looks at the starts and stops in a report from data. They are sorted, for a
// demo begins again before its clock has come to the end.
func checkEvents(t *testing.T, data, want string) {
	t.Helper()
	r, err := agent.Inquire(t.Context(), data, answer.Query{From: "2000-01", By: "month"})
	if err != nil {
		t.Fatal(err)
	}
	var got []string
	for _, e := range r.Events {
		if e.Kind == "started" || e.Kind == "stopped" {
			got = append(got, e.Kind)
		}
	}
	slices.Sort(got)
	if text := strings.Join(got, " "); text != want {
		t.Errorf("events %q, want %q", text, want)
	}
}

// session runs the demo and the agent on data until the opening is booked, checks
// what is shown, and returns the heat given by the hot water.
func session(t *testing.T, data string, from float64) float64 {
	t.Helper()
	after, err := agent.EventTime(data)
	if err != nil {
		t.Fatal(err)
	}
	d, err := demo.Start(demo.Options{Speed: 60, Seed: 1, After: after})
	if err != nil {
		t.Fatal(err)
	}
	defer d.Close()
	r := start(t, d, data)
	s := r.await(t, "the subscription", func(s *view.Snapshot) bool { return s.Broker.Topics == len(d.Site.Tags) })
	if s.Loads[0].Booked.Given < from {
		t.Errorf("hot water starts at %g J, an earlier run left %g J", s.Loads[0].Booked.Given, from)
	}
	ctx, cancel := context.WithCancel(t.Context())
	published := make(chan error, 1)
	go func() { published <- d.Run(ctx) }()
	s = r.await(t, "figures of all loads, and their heat on disk", func(s *view.Snapshot) bool {
		for i := range s.Loads {
			if !s.Loads[i].Figure.Measured() || s.Loads[i].Booked.Given+s.Loads[i].Booked.Taken == 0 {
				return false
			}
		}
		return s.Loads[0].Booked.Given > from && s.At > d.Clock.Start().UnixNano()
	})
	checkTruth(t, d, s)
	checkPage(t, r, s)
	if from == 0 {
		checkEvents(t, data, "started") // of an agent that runs
	}
	cancel()
	if err := errors.Join(<-published, r.stop()); err != nil {
		t.Error(err)
	}
	return s.Loads[0].Booked.Given
}

func checkTruth(t *testing.T, d *demo.Demo, s *view.Snapshot) {
	t.Helper()
	for i := range s.Loads {
		l := &s.Loads[i]
		want, err := d.Duty(l.Name, time.Unix(0, l.Figure.At))
		if err != nil {
			t.Fatal(err)
		}
		if off := l.Figure.Duty - want; off < -2*l.Figure.Uncertainty || off > 2*l.Figure.Uncertainty {
			t.Errorf("%s shows %g W ± %g W, the plant moves %g W", l.Name, l.Figure.Duty, 2*l.Figure.Uncertainty, want)
		}
	}
}

func checkPage(t *testing.T, r *running, s *view.Snapshot) {
	t.Helper()
	given, err := r.metric(t, "heatreeve_load_heat_joules_total", "given", "hot-water")
	if err != nil || given < s.Loads[0].Booked.Given {
		t.Errorf("the page shows %g J given (%v), the snapshot before it %g J", given, err, s.Loads[0].Booked.Given)
	}
	for name, want := range map[string]float64{"heatreeve_broker_connected": 1, "heatreeve_history_writable": 1, "heatreeve_history_damaged_records_total": 0} {
		if v, err := r.metric(t, name); err != nil || v != want {
			t.Errorf("%s is %v, %v; want %v", name, v, err, want)
		}
	}
	u, err := r.metric(t, "heatreeve_load_duty_uncertainty_watts", "hot-water")
	random, err2 := r.metric(t, "heatreeve_load_duty_random_uncertainty_watts", "hot-water")
	if err != nil || err2 != nil || random <= 0 || random >= u {
		t.Errorf("of an uncertainty of %g W (%v) %g W (%v) are random", u, err, random, err2)
	}
	// What the demo bridges is the site's to say; the registers are there from the start.
	bridged, err := r.metric(t, "heatreeve_load_bridged_heat_joules_total", "given", "hot-water")
	spent, err2 := r.metric(t, "heatreeve_load_time_seconds_total", "bridged", "hot-water")
	if err != nil || err2 != nil || (bridged > 0) != (spent > 0) {
		t.Errorf("%g J (%v) bridged in %g s (%v)", bridged, err, spent, err2)
	}
}

// A second agent on the same data says so and ends.
func TestSecondAgentOnTheSameData(t *testing.T) {
	data := t.TempDir()
	d, err := demo.Start(demo.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer d.Close()
	r := start(t, d, data)
	second, err := agent.New(d.Site, agent.Options{Data: data, Listen: "127.0.0.1:0", Log: slog.New(slog.DiscardHandler)})
	if err != nil {
		t.Fatal(err)
	}
	if err := second.Run(t.Context()); err == nil || !strings.Contains(err.Error(), "is another agent running?") {
		t.Errorf("second agent: %v", err)
	}
	if err := r.stop(); err != nil {
		t.Error(err)
	}
}

// A history emptied by hand or by a fault is refused, not begun afresh.
func TestEmptiedHistoryIsRefused(t *testing.T) {
	data := t.TempDir()
	if err := os.WriteFile(filepath.Join(data, agent.HistoryFile), nil, 0o600); err != nil {
		t.Fatal(err)
	}
	d, err := demo.Start(demo.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer d.Close()
	a, err := agent.New(d.Site, agent.Options{Data: data, Listen: "127.0.0.1:0", Log: slog.New(slog.DiscardHandler)})
	if err != nil {
		t.Fatal(err)
	}
	if err := a.Run(t.Context()); err == nil || !strings.Contains(err.Error(), agent.HistoryFile) {
		t.Errorf("emptied history: %v", err)
	}
}
