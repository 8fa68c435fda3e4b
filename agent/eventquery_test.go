package agent

import (
	"heatreeve/agent/answer"
	"strings"
	"testing"
	"time"
)

// What an event may be asked for by is held to what there is.
func TestEventQueriesAreChecked(t *testing.T) {
	for _, tt := range []struct {
		q    answer.EventQuery
		want string
	}{
		{answer.EventQuery{Kind: "warnings"}, `kind "warnings" is none; there are started, stopped`},
		{answer.EventQuery{From: "2026-12-02", To: "2026-12-01"}, "is not after"},
		{answer.EventQuery{Kind: eventShelved}, ""},
		{answer.EventQuery{}, ""},
	} {
		_, _, err := spanOf(&tt.q, time.UTC)
		if tt.want == "" && err != nil || tt.want != "" && (err == nil || !strings.Contains(err.Error(), tt.want)) {
			t.Errorf("%+v: %v, want %q", tt.q, err, tt.want)
		}
	}
}
