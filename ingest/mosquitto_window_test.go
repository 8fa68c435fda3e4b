//go:build services

package ingest

import (
	"net"
	"strings"
	"testing"
)

// free is a port that nobody listens on.
func free(t *testing.T) string {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	_, port, err := net.SplitHostPort(l.Addr().String())
	if err != nil {
		t.Fatal(err)
	}
	return port
}

// Twenty in flight, over each way to a broker, with links that break and sessions that
// stop: nothing is missing, all is in order, and what was acknowledged before a clean end
// never comes again.
func TestWindowOfTwentyOverEachWay(t *testing.T) {
	const messages = 1500
	a := plantAuthority(t)
	secure, socket, both := free(t), free(t), free(t)
	certificates := []string{"cafile " + a.Path("ca.pem"), "certfile " + a.Path("broker.pem"), "keyfile " + a.Path("broker.key")}
	settings := []string{"allow_anonymous true", "max_inflight_messages 20", "listener " + socket + " 127.0.0.1", "protocol websockets"}
	settings = append(append(settings, "listener "+secure+" 127.0.0.1"), certificates...)
	settings = append(append(settings, "listener "+both+" 127.0.0.1", "protocol websockets"), certificates...)
	b := newMosquitto(t, settings...)
	b.start(t)
	for _, o := range []Options{
		{URL: b.url()}, {URL: "ws://127.0.0.1:" + socket},
		{URL: "mqtts://127.0.0.1:" + secure, CAFile: a.Path("ca.pem"), ServerName: "broker.plant"},
		{URL: "wss://127.0.0.1:" + both, CAFile: a.Path("ca.pem"), ServerName: "broker.plant"},
	} {
		scheme, _, _ := strings.Cut(o.URL, ":")
		t.Run(scheme, func(t *testing.T) {
			o.ClientID = o.URL
			s, _, stop := start(t, []Tag{number("a")}, o)
			next, floor := 0, 0
			take := func(until int) {
				eventually(t, "readings", func() bool {
					batch := s.Take(nil)
					for _, r := range batch {
						switch v := int(r.Value); {
						case v > next || v < floor:
							t.Fatalf("%d came where %d was next, and all below %d was acknowledged", v, next, floor)
						case v == next:
							next++
						}
					}
					s.Ack(batch)
					return next >= until
				})
			}
			for i := 0; i < messages; i += 100 {
				ready(t, s) // what a broken link brings again comes before what is new
				b.publish(t, "plant/a", counted(i, i+100)...)
				take(i + 100)
				if i%300 == 0 {
					s.link.Load().end(errLeft)
					eventually(t, "another connection", func() bool { return s.Stats().Connections > 1 })
					continue
				}
				stop()
				floor = next
				s, _, stop = start(t, []Tag{number("a")}, o)
			}
		})
	}
}
