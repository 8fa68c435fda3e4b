package ingest

import (
	"net"
	"os"
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

// An attempt that fails as the one before is not logged again, so its words do not change.
func TestReasonWithoutOurPort(t *testing.T) {
	read := func(port int) error {
		end := func(port int) net.Addr { return &net.TCPAddr{IP: net.IPv4(127, 0, 0, 1), Port: port} }
		return &net.OpError{Op: "read", Net: "tcp", Source: end(port), Addr: end(1883), Err: os.ErrDeadlineExceeded}
	}
	one, other := broker{}.withAdvice(read(54658)), broker{}.withAdvice(read(60072))
	if want := "read tcp 127.0.0.1:1883: i/o timeout; nothing answers there in time"; one != other || !strings.HasPrefix(one, want) {
		t.Errorf("%q and %q, want %q", one, other, want)
	}
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
