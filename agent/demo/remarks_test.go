package demo

import (
	"slices"
	"testing"

	"heatreeve/agent/loads"
	"heatreeve/agent/view"
	"heatreeve/ingest/quality"
)

// A load says which of its readings is doubted, beside what else there is to bear in mind.
func TestRemarkOnQuality(t *testing.T) {
	l := view.Load{Name: "hot-water", Figure: loads.Figure{Duty: 1, Mark: quality.Spike, By: "TT-1", Remark: loads.Remark{Note: "near freezing"}}}
	want := []string{`hot-water: tag "TT-1" is uncertain: spike`, "hot-water, near freezing"}
	if got := remarks(&l, 80); !slices.Equal(got, want) {
		t.Errorf("%q, want %q", got, want)
	}
	l.Figure = loads.Figure{Fault: loads.BadReading, Reason: `tag "TT-1" is bad: failure`, Mark: quality.Failed, By: "TT-1"}
	if got, want := remarks(&l, 80), []string{`hot-water is blind: tag "TT-1" is bad: failure`}; !slices.Equal(got, want) {
		t.Errorf("%q, want %q", got, want)
	}
}
