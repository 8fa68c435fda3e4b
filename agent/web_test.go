package agent

import (
	"bytes"
	"strings"
	"testing"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
	"heatreeve/ingest/quality"
)

// The page at / says why a load is blind, and what to bear in mind with a duty for as
// long as it is shown.
func TestFrontPage(t *testing.T) {
	s := &view.Snapshot{Site: "Mill", Loads: []view.Load{
		{Name: "hall", Verdict: design.Blind, Figure: loads.Figure{Fault: loads.Stale, Reason: "TT-1 is old"}},
		{Name: "cooler", Verdict: design.Holding, Until: clock.UnixNano(), Figure: loads.Figure{Duty: 40.8e3, Uncertainty: 350, Remark: loads.Remark{Latent: true, Note: "sensible part only: coil"}}},
	}}
	doubted := s.Loads[1]
	doubted.Name, doubted.Figure.Mark, doubted.Figure.By = "chiller", quality.Stuck, "TT-2"
	s.Loads = append(s.Loads, doubted)
	s.Tags = []view.Tag{{Name: "TT-8", Newest: 1}, {Name: "TT-9", Kept: "21.5 °C"}}
	page := func(now int64) string {
		var b bytes.Buffer
		front(&b, s, wall(now))
		return strings.Join(strings.Fields(b.String()), " ")
	}
	for _, want := range []string{"Heatreeve at Mill", "hall blind - TT-1 is old", "cooler holding 40.8 ± 0.7 kW sensible part only: coil", `chiller holding 40.8 ± 0.7 kW tag "TT-2" is uncertain: stuck; sensible part only: coil`, "TT-9: the broker had kept 21.5 °C, of an age that nobody knows"} {
		if got := page(clock.UnixNano()); !strings.Contains(got, want) {
			t.Errorf("page %q, want %q in it", got, want)
		}
	}
	if got := page(clock.UnixNano()); strings.Contains(got, "TT-8") {
		t.Errorf("page %q tells of a tag that nothing was kept of", got)
	}
	if got := page(clock.UnixNano() + 1); strings.Contains(got, "sensible") || !strings.Contains(got, "cooler blind - no reading") {
		t.Errorf("page %q after the inputs ran out", got)
	}
}
