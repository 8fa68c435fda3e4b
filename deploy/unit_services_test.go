//go:build services

package deploy

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// exposureBound is the most that systemd's own review may find, in its tenths of a point (0 best, 100 worst). Debian
// 12's systemd 252 gives 12; what is left is the network, which an MQTT client needs.
const exposureBound = "15"

// writeUnit writes the unit where the program to start exists, since the review and the parser look for it.
func writeUnit(t *testing.T, pairs ...string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "heatreeve.service")
	text := moved(t, read(t, "systemd/heatreeve.service"), append([]string{"/usr/bin/heatreeve", "/bin/true"}, pairs...)...)
	if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

func verifyUnit(t *testing.T, path string) string {
	t.Helper()
	out, err := output(t, "systemd-analyze", "verify", "--man=no", "--recursive-errors=no", path)
	if err != nil {
		out += err.Error()
	}
	return out
}

func TestSystemdReadsTheUnit(t *testing.T) {
	if out := verifyUnit(t, writeUnit(t)); out != "" {
		t.Errorf("systemd-analyze verify: %s", out)
	}
	// The same question about wrong units, to know that the silence above means something.
	for _, wrong := range [][2]string{{"ProtectHome=", "ProtectHomes="}, {"WatchdogSec=60", "WatchdogSec=soon"}, {"@system-service", "@no-such-set"}} {
		if out := verifyUnit(t, writeUnit(t, wrong[0], wrong[1])); out == "" {
			t.Errorf("systemd-analyze verify finds nothing wrong with %q", wrong[1])
		}
	}
}

func TestSystemdFindsLittleExposed(t *testing.T) {
	review := []string{"security", "--offline=true", "--no-pager", "--threshold=" + exposureBound}
	out, err := output(t, "systemd-analyze", append(review, writeUnit(t))...)
	score := regexp.MustCompile(`Overall exposure level.*`).FindString(out)
	if err != nil || score == "" {
		t.Errorf("systemd-analyze security, bound %s: %v\n%s", exposureBound, err, out)
	}
	t.Log(score)

	out, err = output(t, "systemd-analyze", append(review, writeUnit(t, "DynamicUser=yes", "DynamicUser=no", "ProtectSystem=strict", "ProtectSystem=no"))...)
	if err == nil || !strings.Contains(out, "Overall exposure level") {
		t.Errorf("a unit that runs as root passes the review: %v\n%s", err, out)
	}
}
