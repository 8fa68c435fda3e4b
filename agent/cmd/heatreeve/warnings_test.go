package main

import (
	"io"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/warn"
)

// Each warning begins after an empty line and has its lines behind it, with times as those
// of events are written.
func TestStandingWarningsAreSetApart(t *testing.T) {
	dublin := time.FixedZone("", 3600)
	greatest := -0.15
	d := warn.Document{Subject: "milk", Kind: "short", State: "unacknowledged", Greatest: &greatest,
		Since: "2026-07-02T12:50:00+01:00", Begin: "2026-07-02T13:00:00+01:00"}
	var out strings.Builder
	tellStanding(&out, &answer.Standing{Site: "hall", At: time.Date(2026, 7, 2, 13, 1, 0, 0, dublin), Warnings: []warn.Document{d}})
	want := `hall, up to 2026-07-02 13:01 +01:00

milk: short, unacknowledged
  greatest 15.0 % below what is expected
  since 2026-07-02 12:50 +01:00
  raised 2026-07-02 13:00 +01:00
For information only: no safety function, no alarm of record.
`
	if out.String() != want {
		t.Errorf("got\n%s\nwant\n%s", out.String(), want)
	}
}

// A duration in days is not one that --for takes: the error says what is.
func TestShelfLengthIsExplained(t *testing.T) {
	var errs strings.Builder
	status := run(t.Context(), []string{"shelve", "milk", "--for", "40d"}, io.Discard, &errs)
	if status != exitWrong || !strings.Contains(errs.String(), `"40d" for --for: write a duration, such as 90m or 8h, a day as 24h`) {
		t.Errorf("status %d: %s", status, errs.String())
	}
}
