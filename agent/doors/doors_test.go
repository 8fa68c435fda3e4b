package doors

import (
	"bufio"
	"bytes"
	"context"
	"errors"
	"io"
	"log/slog"
	"net"
	"net/http"
	"strings"
	"testing"
	"testing/synctest"
	"time"

	"github.com/prometheus/client_golang/prometheus/testutil"

	"heatreeve/agent/metrics"
)

// pipes is a listener whose clients are in the same process, so that a synctest bubble knows
// when they wait.
type pipes struct {
	come   chan net.Conn
	closed chan struct{}
}

func newPipes() *pipes { return &pipes{make(chan net.Conn), make(chan struct{})} }

func (p *pipes) Accept() (net.Conn, error) {
	select {
	case c := <-p.come:
		return c, nil
	case <-p.closed:
		return nil, net.ErrClosed
	}
}

func (p *pipes) Close() error   { close(p.closed); return nil }
func (p *pipes) Addr() net.Addr { return &net.TCPAddr{IP: net.IPv4(127, 0, 0, 1), Port: 1} }

// dial connects a client.
func (p *pipes) dial() net.Conn {
	client, server := net.Pipe()
	p.come <- server
	return client
}

// serving serves h in the bubble with so many places, and ends with the test.
func serving(t *testing.T, most int, h http.Handler) (*pipes, metrics.Doors) {
	t.Helper()
	l, m := newPipes(), metrics.NewDoors()
	ctx, cancel := context.WithCancel(t.Context())
	ended := make(chan error, 1)
	log := newSparing(slog.DiscardHandler, time.Second)
	places := newPlaces(l, most, m.Open.WithLabelValues("public"), m.Waited.WithLabelValues("public"))
	go func() { ended <- (&Guard{openly: true}).serve(ctx, places, h, log) }()
	t.Cleanup(func() {
		cancel()
		if err := <-ended; err != nil {
			t.Error(err)
		}
	})
	return l, m
}

const plainly = "GET / HTTP/1.1\r\nHost: localhost\r\n"

// Clients that do nothing, or do it slowly, are heard for so long and no longer.
func TestSlowClients(t *testing.T) {
	answer := http.HandlerFunc(func(w http.ResponseWriter, _ *http.Request) {
		w.Write(bytes.Repeat([]byte("x"), 1<<20))
	})
	for name, tt := range map[string]struct {
		says  string // at once
		drips bool   // and then a byte a second
		reads bool   // what is answered
		want  time.Duration
	}{
		"silent":             {"", false, true, 5 * time.Second},
		"half a header":      {"GET / HT", false, true, 5 * time.Second},
		"drips its header":   {plainly, true, true, 5 * time.Second},
		"takes no answer":    {plainly + "\r\n", false, false, 20 * time.Second},
		"asks no more":       {plainly + "\r\n", false, true, time.Minute},
		"drips what it adds": {plainly + "Content-Length: 100000\r\n\r\n", true, true, 10 * time.Second},
	} {
		t.Run(name, func(t *testing.T) {
			synctest.Test(t, func(t *testing.T) {
				l, _ := serving(t, 10, answer)
				begun := time.Now()
				c := l.dial()
				said := make(chan struct{})
				defer func() { c.Close(); <-said }()
				go func() {
					defer close(said)
					_, err := io.WriteString(c, tt.says)
					for ; tt.drips && err == nil; time.Sleep(time.Second) {
						_, err = io.WriteString(c, "x")
					}
				}()
				if !tt.reads {
					time.Sleep(tt.want + time.Second)
				}
				n, err := io.Copy(io.Discard, c)
				took := time.Since(begun)
				if !tt.reads {
					took -= time.Second
				}
				if err != nil || took < tt.want || took > tt.want+time.Second || !tt.reads && n > 1<<19 {
					t.Errorf("ended after %v with %d bytes, %v; want %v", took, n, err, tt.want)
				}
			})
		})
	}
}

// An answer that takes long is not broken off by the bounds of what is asked, as long as it
// extends its own.
func TestLongAnswer(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		l, _ := serving(t, 2, http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
			control := http.NewResponseController(w)
			for range 10 {
				if err := control.SetWriteDeadline(time.Now().Add(20 * time.Second)); err != nil {
					t.Error(err)
				}
				io.WriteString(w, "x")
				control.Flush()
				select {
				case <-time.After(15 * time.Second):
				case <-r.Context().Done():
					return
				}
			}
		}))
		c := l.dial()
		defer c.Close()
		begun := time.Now()
		if body, err := once(c); err != nil || len(body) != 10 || time.Since(begun) != 150*time.Second {
			t.Errorf("%q after %v, %v", body, time.Since(begun), err)
		}
	})
}

// once sends a request and reads the answer.
func once(c net.Conn) (string, error) {
	if _, err := io.WriteString(c, plainly+"\r\n"); err != nil {
		return "", err
	}
	resp, err := http.ReadResponse(bufio.NewReader(c), nil)
	if err != nil {
		return "", err
	}
	body, err := io.ReadAll(resp.Body)
	return string(body), err
}

// Who finds all places taken waits until one is free, is counted, and is answered then.
func TestMoreThanThereArePlaces(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		let := make(chan struct{})
		l, m := serving(t, 2, http.HandlerFunc(func(w http.ResponseWriter, _ *http.Request) {
			<-let
			w.Header().Set("Connection", "close")
			io.WriteString(w, "answer")
		}))
		answers := make(chan error)
		for range 3 {
			c := l.dial()
			defer c.Close()
			go func() {
				body, err := once(c)
				if err == nil && body != "answer" {
					err = errors.New(body)
				}
				answers <- err
			}()
		}
		synctest.Wait()
		if open, waited := testutil.ToFloat64(m.Open), testutil.ToFloat64(m.Waited); open != 2 || waited != 1 {
			t.Errorf("%g connections are open, %g have waited", open, waited)
		}
		for range 3 {
			let <- struct{}{}
			if err := <-answers; err != nil {
				t.Error(err)
			}
		}
		synctest.Wait()
		if open, waited := testutil.ToFloat64(m.Open), testutil.ToFloat64(m.Waited); open != 0 || waited != 1 {
			t.Errorf("%g connections are open, %g have waited", open, waited)
		}
	})
}

// Connections that are kept for a next request hold nobody up: the longest idle gives way, and
// one that becomes idle while somebody waits.
func TestIdleGivesWay(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		l, m := serving(t, 2, http.HandlerFunc(func(w http.ResponseWriter, _ *http.Request) { io.WriteString(w, "answer") }))
		var all []net.Conn
		for i := range 5 {
			c := l.dial()
			defer c.Close()
			if body, err := once(c); err != nil || body != "answer" {
				t.Fatalf("client %d: %s, %v", i, body, err)
			}
			all = append(all, c)
			synctest.Wait()
			time.Sleep(time.Millisecond)
		}
		for i, c := range all[:3] {
			if n, err := c.Read(make([]byte, 1)); err != io.EOF {
				t.Errorf("client %d is still heard: %d, %v", i, n, err)
			}
		}
		if body, err := once(all[3]); err != nil || body != "answer" {
			t.Errorf("client 3: %s, %v", body, err)
		}
		if waited := testutil.ToFloat64(m.Waited); waited != 3 {
			t.Errorf("%g have waited", waited)
		}
	})
}

// One line of a kind each while, with how many there were meanwhile.
func TestLogIsSpared(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		var b strings.Builder
		log := slog.New(newSparing(slog.NewTextHandler(&b, &slog.HandlerOptions{ReplaceAttr: func(_ []string, a slog.Attr) slog.Attr {
			if a.Key == slog.TimeKey {
				return slog.Attr{}
			}
			return a
		}}), 10*time.Second))
		for range 3 {
			log.Warn("http: TLS handshake error from 192.0.2.7:1: EOF")
			log.With("by", "x").Error("http: panic serving 192.0.2.7:2")
			log.Info("Listening on")
			time.Sleep(4 * time.Second)
		}
		log.Warn("http: TLS handshake error from 192.0.2.8:3: EOF")
		want := `level=WARN msg="http: TLS handshake error from 192.0.2.7:1: EOF"
level=ERROR msg="http: panic serving 192.0.2.7:2" by=x
level=WARN msg="http: TLS handshake error from 192.0.2.8:3: EOF" and_held_back=2
`
		if b.String() != want {
			t.Errorf("%s", b.String())
		}
	})
}

// An address that is taken is told with what to do.
func TestAddressIsTaken(t *testing.T) {
	first, err := Open("127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer first.Close()
	at := first.Public().String()
	if _, err := Open(at); err == nil || !strings.Contains(err.Error(), at) || !strings.Contains(err.Error(), "give another --listen") {
		t.Errorf("%v", err)
	}
}
