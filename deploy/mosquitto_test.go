package deploy

import (
	"net/netip"
	"strings"
	"testing"
)

// once returns the settings by key; log_type alone may stand more than once.
func once(t *testing.T, text string) map[string]string {
	t.Helper()
	values := map[string]string{}
	for _, s := range settings(text) {
		if _, twice := values[s[0]]; twice && s[0] != "log_type" {
			t.Errorf("%s is set twice", s[0])
		}
		values[s[0]] = s[1]
	}
	return values
}

func wantSettings(t *testing.T, got, want map[string]string) {
	t.Helper()
	for key, value := range want {
		if got[key] != value {
			t.Errorf("%s = %q; want %q", key, got[key], value)
		}
	}
}

func checkMosquittoConf(t *testing.T, file string) {
	got := once(t, read(t, file))
	wantSettings(t, got, map[string]string{
		"persistence":                  "true",
		"autosave_interval":            "60",
		"max_inflight_messages":        "1000",
		"max_queued_messages":          "65000",
		"message_size_limit":           "65536",
		"persistent_client_expiration": "30d",
		"allow_anonymous":              "false",
		"acl_file":                     "/etc/mosquitto/heatreeve.acl",
		"include_dir":                  "/etc/mosquitto/conf.d",
	})
	_, address, _ := strings.Cut(got["listener"], " ")
	if a, err := netip.ParseAddr(address); err != nil || !a.IsLoopback() {
		t.Errorf("the listener without TLS is open to %q; want loopback only", got["listener"])
	}
}

func checkMosquittoTLS(t *testing.T, file string) {
	got := once(t, read(t, file))
	wantSettings(t, got, map[string]string{"listener": "8883", "require_certificate": "true", "tls_version": "tlsv1.2"})
	for _, key := range []string{"cafile", "certfile", "keyfile"} {
		if !strings.HasPrefix(got[key], "/etc/mosquitto/certs/") {
			t.Errorf("%s = %q; want a file in /etc/mosquitto/certs", key, got[key])
		}
	}
}

// checkACL wants every line under a name, and the agent to write nothing.
func checkACL(t *testing.T, file string) {
	user, writes := "", []string{}
	for _, s := range settings(read(t, file)) {
		switch {
		case s[0] == "user":
			user = s[1]
		case s[0] != "topic" || user == "":
			t.Errorf("%s %s: want only topics, each under a user", s[0], s[1])
		default:
			access, topic, _ := strings.Cut(s[1], " ")
			if access != "read" && access != "write" {
				t.Errorf("topic %s: want read or write said", s[1])
			}
			if user == "heatreeve" && access != "read" {
				writes = append(writes, topic)
			}
		}
	}
	if len(writes) != 0 {
		t.Errorf("the agent may write %q; it reads only", writes)
	}
}
