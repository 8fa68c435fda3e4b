package agent

import (
	"bytes"
	"log/slog"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
)

func TestWatchTellsWhatChanges(t *testing.T) {
	var out bytes.Buffer
	w := newWatch(slog.New(slog.NewTextHandler(&out, nil)), 1)
	for _, tt := range []struct {
		at      time.Duration
		verdict design.Verdict
		reason  string
		want    string // in what is told; empty for silence
	}{
		{0, design.Undecided, "", ""},
		{time.Second, design.Holding, "", ""},
		{2 * time.Second, design.Short, "", `level=WARN msg="duty has left its design" load=hall verdict=short duty="100.0 kW" design="200.0 kW" allow="8 %"`},
		{3 * time.Second, design.Short, "", ""},
		{4 * time.Second, design.Blind, "TT-1 is old", ""}, // too soon
		{63 * time.Second, design.Blind, "TT-1 is old", `level=WARN msg="load is blind" load=hall verdict=blind reason="TT-1 is old"`},
		{130 * time.Second, design.Blind, "TT-2 is old", `reason="TT-2 is old"`},
		{200 * time.Second, design.Undecided, "", `level=INFO msg="load is well again" load=hall verdict=undecided`},
		{300 * time.Second, design.Holding, "", ""},
	} {
		out.Reset()
		figure := loads.Figure{At: 1, Duty: 100e3}
		if tt.verdict == design.Blind {
			figure = loads.Figure{At: 1, Fault: loads.Stale, Reason: tt.reason}
		}
		s := &view.Snapshot{Loads: []view.Load{{Name: "hall", Figure: figure, Until: 1 << 62, Design: 200e3, Allow: 0.08, Verdict: tt.verdict}}}
		w.look(s, clock.Add(tt.at))
		if got := out.String(); tt.want == "" && got != "" || !strings.Contains(got, tt.want) {
			t.Errorf("%v, %v: told %q, want %q", tt.at, tt.verdict, got, tt.want)
		}
	}
}
