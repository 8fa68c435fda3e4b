package ingest

import (
	"testing"
	"time"

	"go.uber.org/goleak"
)

func TestMain(m *testing.M) { goleak.VerifyTestMain(m) }

// eventually waits until ok, looking every few milliseconds.
func eventually(t testing.TB, what string, ok func() bool) {
	t.Helper()
	tick := time.NewTicker(2 * time.Millisecond)
	defer tick.Stop()
	late := time.NewTimer(30 * time.Second)
	defer late.Stop()
	for !ok() {
		select {
		case <-tick.C:
		case <-late.C:
			t.Fatalf("waited in vain: %s", what)
		}
	}
}
