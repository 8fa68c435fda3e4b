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
		{2 * time.Second, design.Short, "", ""}, // a warning, and told as such
		{3 * time.Second, design.Blind, "TT-0 is old", `level=WARN msg="load is blind"`},
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

// A remark is told of once; a verdict that comes with one carries it.
func TestWatchTellsOfARemarkOnce(t *testing.T) {
	var out bytes.Buffer
	w := newWatch(slog.New(slog.NewTextHandler(&out, nil)), 1)
	for _, tt := range []struct {
		verdict design.Verdict
		note    string
		want    []string
	}{
		{design.Holding, "", nil},
		{design.Holding, "near freezing: outlet", []string{`msg="duty with a remark`, `load=hall duty="100.0 kW" note="near freezing: outlet"`}},
		{design.Holding, "", nil},
		{design.Holding, "near freezing: inlet", nil},
		{design.Over, "near freezing: inlet", nil},
	} {
		out.Reset()
		figure := loads.Figure{At: 1, Duty: 100e3, Remark: loads.Remark{Note: tt.note}}
		w.look(&view.Snapshot{Loads: []view.Load{{Name: "hall", Figure: figure, Until: 1 << 62, Verdict: tt.verdict}}}, clock)
		if got := out.String(); strings.Count(got, "\n") != min(len(tt.want), 1) {
			t.Errorf("%v with %q: told %q", tt.verdict, tt.note, got)
		}
		for _, want := range tt.want {
			if !strings.Contains(out.String(), want) {
				t.Errorf("%v with %q: told %q, want %q", tt.verdict, tt.note, out.String(), want)
			}
		}
	}
}
