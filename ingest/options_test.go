package ingest

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

func TestBrokerAddress(t *testing.T) {
	for raw, want := range map[string]string{
		"mqtt://127.0.0.1":          "mqtt://127.0.0.1:1883",
		"mqtt://broker.plant:1884/": "mqtt://broker.plant:1884",
		"mqtts://broker.plant":      "mqtts://broker.plant:8883",
		"MQTT://[::1]:1883":         "mqtt://[::1]:1883",
		"ws://h":                    "ws://h:80/",
		"wss://h/a%20b/mqtt":        "wss://h:443/a%20b/mqtt",
	} {
		if b, err := parseBroker(raw); err != nil || b.String() != want {
			t.Errorf("%q is %v, %v; want %s", raw, b, err, want)
		}
	}
	for _, raw := range []string{
		"", "127.0.0.1:1883", "tcp://h:1883", "ws://h?x=1", "ws://h/#f", "wss://ann:s3cret@h/mqtt", "mqtt://", "mqtt://:1883", "mqtt://h:0", "mqtt://h:65536", "mqtt://h:x",
		"mqtt://h/topic", "mqtt://h?x=1", "mqtt://h#f", "mqtt://ann:s3cret@h:1883", "mqtt://ann:s3cret@h:x", "mqtt://ann:s3cret@h h", "mqtt://h:1\x7f",
	} {
		_, err := parseBroker(raw)
		if err == nil {
			t.Errorf("%q was accepted", raw)
		} else if strings.Contains(err.Error(), "s3cret") {
			t.Errorf("%q: the message shows the password: %v", raw, err)
		}
	}
}

func TestWrongOptions(t *testing.T) {
	empty := filepath.Join(t.TempDir(), "empty.pem")
	if err := os.WriteFile(empty, nil, 0o600); err != nil {
		t.Fatal(err)
	}
	wrong := map[string]func(*Options){
		"client id":    func(o *Options) { o.ClientID = "" },
		"user name":    func(o *Options) { o.Password = func() (string, error) { return "", nil } },
		"negative":     func(o *Options) { o.Buffer = -1 },
		"keep-alive":   func(o *Options) { o.KeepAlive = time.Millisecond },
		"mqtts://":     func(o *Options) { o.ServerName = "x" },
		"absent.pem":   func(o *Options) { o.URL, o.CAFile = "mqtts://h", "absent.pem" },
		"PEM form":     func(o *Options) { o.URL, o.CAFile = "mqtts://h", empty },
		"both be":      func(o *Options) { o.URL, o.CertFile = "mqtts://h", empty },
		"certificate":  func(o *Options) { o.URL, o.CertFile, o.KeyFile = "mqtts://h", empty, empty },
		"scheme":       func(o *Options) { o.URL = "http://h" },
		"feeds 2 tags": func(o *Options) { o.Buffer = 1 },
	}
	for want, spoil := range wrong {
		o := Options{URL: "mqtt://h", ClientID: "test"}
		spoil(&o)
		if _, err := New([]Tag{celsius(), celsius()}, o); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("got %v; want an error with %q", err, want)
		}
	}
	if _, err := New(nil, Options{}); err == nil || !strings.Contains(err.Error(), "scheme") || !strings.Contains(err.Error(), "client id") {
		t.Errorf("got %v; want both faults at once", err)
	}
}
