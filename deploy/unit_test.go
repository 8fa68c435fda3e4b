package deploy

import (
	"slices"
	"strings"
	"testing"

	"github.com/coreos/go-systemd/v22/unit"
)

// unitFile is a service unit: the values of each key by "Section.Key", in order.
type unitFile map[string][]string

func parseUnit(t *testing.T, text string) unitFile {
	t.Helper()
	options, err := unit.DeserializeOptions(strings.NewReader(text))
	if err != nil {
		t.Fatal(err)
	}
	u := unitFile{}
	for _, o := range options {
		key := o.Section + "." + o.Name
		u[key] = append(u[key], o.Value)
	}
	return u
}

// execStart is the command line of the unit, split at blanks as it holds no quotes.
func (u unitFile) execStart() []string {
	return strings.Fields(strings.Join(u["Service.ExecStart"], " "))
}

func checkUnit(t *testing.T, file string) {
	u := parseUnit(t, read(t, file))
	want := []string{"/usr/bin/heatreeve", "run", "--site", "/etc/heatreeve/site.yaml", "--data", "${STATE_DIRECTORY}", "--listen", "127.0.0.1:9617"}
	if got := u.execStart(); !slices.Equal(got, want) {
		t.Errorf("ExecStart = %q; want %q", got, want)
	}
	for key, want := range map[string]string{
		"Service.Type":                     "notify",
		"Service.Restart":                  "on-failure",
		"Service.RestartPreventExitStatus": "2",
		"Service.DynamicUser":              "yes",
		"Service.StateDirectory":           "heatreeve",
		"Service.ProtectSystem":            "strict",
		"Service.NoNewPrivileges":          "yes",
		"Service.CapabilityBoundingSet":    "",
		"Service.LoadCredential":           "mqtt-password:/etc/heatreeve/mqtt-password",
		"Install.WantedBy":                 "multi-user.target",
	} {
		if got := u[key]; len(got) != 1 || got[0] != want {
			t.Errorf("%s = %q; want %q", key, got, want)
		}
	}
	for _, key := range []string{"WatchdogSec", "MemoryMax", "SystemCallFilter", "RestrictAddressFamilies"} {
		if len(u["Service."+key]) == 0 {
			t.Errorf("%s is not set", key)
		}
	}
	// The secret itself has no place in a file that every user can read.
	for key := range u {
		if strings.Contains(key, "SetCredential") {
			t.Errorf("%s: a secret in the unit", key)
		}
	}
}
