//go:build !services

package ingest

import (
	"os"
	"testing"
)

// The tests against mosquitto are compiled with the build tag "services". Where
// the environment requires them, leaving the tag out must not pass unseen.
func TestServicesAreBuiltWhereRequired(t *testing.T) {
	if got := os.Getenv("HEATREEVE_SERVICES"); got == "required" {
		t.Errorf("HEATREEVE_SERVICES=%q, but the tests with real services are not compiled in; run go test -tags services", got)
	}
}
