package view

import (
	"math"
	"strings"
	"testing"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
)

const second = int64(1e9)

func snapshot(until int64) *Snapshot {
	return &Snapshot{Slack: 7 * second, Loads: []Load{{
		Figure: loads.Figure{Duty: 5e5}, Until: until, Verdict: design.Holding,
		Means: [3]loads.Mean{{Duty: 5e5, Coverage: 1}, {Duty: 5e5, Coverage: 0.5}, {Duty: 5e5, Coverage: 1}},
	}}}
}

// A figure is shown until its inputs have run out of age, and not a moment longer.
func TestCurrent(t *testing.T) {
	s := snapshot(100 * second)
	if f, v := s.Current(0, 107*second); !f.Measured() || v != design.Holding {
		t.Errorf("in time: fault %v, verdict %v", f.Fault, v)
	}
	if f, v := s.Current(0, 107*second+1); f.Fault != loads.Stale || v != design.Blind || f.Reason == "" {
		t.Errorf("out of age: fault %v, verdict %v, reason %q", f.Fault, v, f.Reason)
	}
	if f, _ := snapshot(math.MaxInt64).Current(0, math.MaxInt64); !f.Measured() {
		t.Errorf("constants alone: fault %v, want none", f.Fault)
	}
}

// While event time stands still, the windows move on: what has passed since the
// inputs ran out counts as not measured.
func TestMeanFadesWhenNothingComes(t *testing.T) {
	s := snapshot(100 * second)
	for _, tt := range []struct {
		k    int
		now  int64
		want float64
	}{{0, 107, 1}, {0, 137, 0.5}, {0, 200, 0}, {1, 107 + 450, 0.25}, {2, 107 + 3600, 0}} {
		if m := s.Mean(0, tt.k, tt.now*second); !(math.Abs(m.Coverage-tt.want) <= 1e-12) {
			t.Errorf("window %d at %d s: coverage %g, want %g", tt.k, tt.now, m.Coverage, tt.want)
		}
	}
}

// Where event time goes on, the missing time is booked already and counts once.
func TestMeanCountsMissingTimeOnce(t *testing.T) {
	s := snapshot(100 * second)
	s.At = 400 * second
	if m := s.Mean(0, 1, 407*second); m.Coverage != 0.5 {
		t.Errorf("coverage %g, want the 0.5 that was booked", m.Coverage)
	}
}

func TestReasonTellsOfSlowClocks(t *testing.T) {
	s := snapshot(100 * second)
	s.Lag = 3600 * second
	if f, _ := s.Current(0, 200*second); !strings.Contains(f.Reason, "1h0m0s behind") {
		t.Errorf("reason %q, want the lag of an hour in it", f.Reason)
	}
}
