package proving_test

import (
	"strings"
	"testing"

	"heatreeve/agent/proving"
)

// With a tag of the pump, a flow near zero is judged by whether it runs; and a flow of exactly
// zero stands, and is not stuck.
func TestFlowAtRest(t *testing.T) {
	for _, tt := range []struct {
		name       string
		flow, pump float64
		want, none string
	}{
		{"offset", 0.15, 0, "1 hall: its pump P-1 reads 0 %, so 0.15 m3/h of FT-1 is its zero offset: have its zero set", "if the pump"},
		{"offset beyond idle", 0.5, 0, "1 hall: its pump P-1 reads 0 %, so 0.5 m3/h of FT-1 is its zero offset: have its zero set", "if the pump"},
		{"runs against a shut valve", 0, 100, "1 hall: its pump P-1 reads 100 %, and FT-1 shows 0 m3/h: look for a shut valve, or a meter that does not measure", "FT-1: has not moved"},
		{"off", 0, 0, "try again while it runs", "its pump"},
		{"flows", 10, 100, "1 FT-1: has not moved", "its pump"},
	} {
		s, trial := bench(t, strings.NewReplacer("loads:", "  P-1: {topic: a/P-1, unit: \"%\", accuracy: ± 1 %}\nloads:", "    witness: ET-1", "    running: P-1\n    witness: ET-1").Replace(file))
		p := sound
		p.flow = tt.flow
		p.send(s, trial, func(tag string, h *proving.Heard) bool {
			if tag == "P-1" {
				h.Value = tt.pump / 100
			}
			return true
		})
		r := trial.Tell(60, make([][]proving.Refused, len(s.Tags)))
		if got := strings.Join(found(&r), "\n"); !strings.Contains(got, tt.want) || strings.Contains(got, tt.none) {
			t.Errorf("%s: found\n%s\nwant %s, and not %s", tt.name, got, tt.want, tt.none)
		}
	}
}
