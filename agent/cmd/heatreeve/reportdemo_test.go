package main

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"heatreeve/agent/answer"
	"os"
	"path/filepath"
	"slices"
	"sync"
	"testing"
	"time"
)

// heard is what a command prints while it runs.
type heard struct {
	mu   sync.Mutex
	text bytes.Buffer
}

func (h *heard) Write(p []byte) (int, error) {
	h.mu.Lock()
	defer h.mu.Unlock()
	return h.text.Write(p)
}

func (h *heard) String() string {
	h.mu.Lock()
	defer h.mu.Unlock()
	return h.text.String()
}

// The report on a demo that runs comes from the agent, and after the end from the file;
// what is over by then is the same in both.
func TestReportWhileTheDemoRuns(t *testing.T) {
	data := t.TempDir()
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	var out, errs heard
	ended := make(chan int, 1)
	go func() {
		ended <- run(ctx, []string{"demo", "--data", data, "--listen", "127.0.0.1:0", "--speed", "600"}, &out, &errs)
	}()
	args := []string{"--data", data, "--from", time.Now().AddDate(0, 0, -1).Format("2006-01-02"), "--by", "hour", "--demand", "5m", "--format", "json"}
	live := awaitReport(t, ended, args)
	if _, err := os.Stat(filepath.Join(data, "agent.address")); err != nil {
		t.Errorf("while the agent runs: %v", err)
	}
	cancel()
	if status := <-ended; status != exitGood {
		t.Fatalf("demo: status %d, %s%s", status, &out, &errs)
	}
	if _, err := os.Stat(filepath.Join(data, "agent.address")); err == nil {
		t.Error("the address of the agent is still there after its end")
	}
	status, text, said := report(t, args...)
	var after answer.Report
	if err := json.Unmarshal([]byte(text), &after); status != exitGood || err != nil {
		t.Fatalf("after the end: status %d, %s, %v", status, said, err)
	}
	if after.Site != "Brackwater Creamery" || after.Zone != "Europe/Dublin" || after.Accounted.Before(live.Accounted) {
		t.Errorf("after the end: %s, %s, up to %v; before it up to %v", after.Site, after.Zone, after.Accounted, live.Accounted)
	}
	sameWhereOver(t, live, &after)
	for _, l := range after.Loads {
		// The register holds the minute under way at the end as well.
		g, sum := l.Register, l.Total
		heat, time := g.Given+g.Taken-sum.Given-sum.Taken, g.Measured-sum.Measured
		if heat < -1 || heat > 60*1e6 || time < 0 || time > 60 {
			t.Errorf("%s: the registers are %g J and %g s above the sum", l.Load, heat, time)
		}
	}
}

// awaitReport asks until the report has an hour of all four loads that is over.
func awaitReport(t *testing.T, ended <-chan int, args []string) *answer.Report {
	t.Helper()
	ticker, deadline := time.NewTicker(100*time.Millisecond), time.After(60*time.Second)
	defer ticker.Stop()
	for {
		select {
		case status := <-ended:
			t.Fatalf("the demo has ended with status %d", status)
		case <-deadline:
			_, text, errs := report(t, args...)
			t.Fatalf("no report within 60 s: %s%s", text, errs)
		case <-ticker.C:
			status, text, _ := report(t, args...)
			var r answer.Report
			if status != exitGood || json.Unmarshal([]byte(text), &r) != nil || len(r.Loads) != 4 {
				continue
			}
			if !slices.ContainsFunc(r.Loads, func(l answer.LoadReport) bool { return l.Periods[0].AccountedTo.Before(l.Periods[0].End) }) {
				return &r
			}
		}
	}
}

// sameWhereOver holds what a report says of hours that were over against a later one.
func sameWhereOver(t *testing.T, before, after *answer.Report) {
	t.Helper()
	compared := 0
	for i, l := range before.Loads {
		for k, p := range l.Periods {
			if p.AccountedTo.Before(p.End) {
				continue
			}
			if got, want := fmt.Sprintf("%+v", flat(t, after.Loads[i].Periods[k])), fmt.Sprintf("%+v", flat(t, p)); got != want {
				t.Errorf("%s: was\n%s\nis\n%s", l.Load, want, got)
			}
			compared++
		}
	}
	if compared < 3 {
		t.Errorf("only %d hours could be compared", compared)
	}
}

func flat(t *testing.T, p answer.PeriodReport) string {
	t.Helper()
	b, err := json.Marshal(p)
	if err != nil {
		t.Fatal(err)
	}
	return string(b)
}
