package agent

import (
	"strings"
	"testing"
	"time"
)

// What an event may be asked for by is held to what there is.
func TestEventQueriesAreChecked(t *testing.T) {
	for _, tt := range []struct {
		q    EventQuery
		want string
	}{
		{EventQuery{Kind: "warnings"}, `kind "warnings" is none; there are started, stopped`},
		{EventQuery{From: "2026-12-02", To: "2026-12-01"}, "is not after"},
		{EventQuery{Kind: eventShelved}, ""},
		{EventQuery{}, ""},
	} {
		_, _, err := tt.q.span(time.UTC)
		if tt.want == "" && err != nil || tt.want != "" && (err == nil || !strings.Contains(err.Error(), tt.want)) {
			t.Errorf("%+v: %v, want %q", tt.q, err, tt.want)
		}
	}
}
