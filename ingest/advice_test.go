package ingest

import (
	"net"
	"strings"
	"testing"
)

// deafPort listens, and ends each connection as soon as something has come on it, as a
// listener for something else does.
func deafPort(t *testing.T) (address string) {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { _ = l.Close() })
	go func() {
		for {
			c, err := l.Accept()
			if err != nil {
				return
			}
			_, _ = c.Read(make([]byte, 1))
			_ = c.Close()
		}
	}()
	return l.Addr().String()
}

// Why no connection comes about is told with what to do.
func TestAdvice(t *testing.T) {
	deaf := deafPort(t)
	for _, tt := range []struct{ url, want string }{
		{"mqtt://127.0.0.1:1", "check host and port, and that the broker runs"},
		{"mqtt://nosuch.invalid", "check the name of the broker's host"},
		{"mqtt://" + deaf, "it may want TLS"},
		{"mqtts://" + deaf, "check that the port speaks TLS"},
	} {
		s, _, _ := start(t, []Tag{number("a")}, Options{URL: tt.url})
		eventually(t, "a failure", func() bool { return s.Stats().Failures > 0 })
		if got := s.Stats().LastError; !strings.Contains(got, tt.want) || strings.Contains(got, "tls: tls") {
			t.Errorf("%s: %q, want %q", tt.url, got, tt.want)
		}
	}
}
