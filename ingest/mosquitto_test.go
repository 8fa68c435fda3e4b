//go:build services

package ingest

import (
	"fmt"
	"net"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// program finds a program of a Debian package.
func program(t *testing.T, name, debianPackage string) string {
	t.Helper()
	path, err := exec.LookPath(name)
	if err != nil {
		path = filepath.Join("/usr/sbin", name) // not on everyone's PATH
		if _, err := os.Stat(path); err != nil {
			t.Fatalf("%s is not installed, and this test needs it; on Debian: apt-get install %s", name, debianPackage)
		}
	}
	return path
}

// mosquitto is a broker process with a folder of its own.
type mosquitto struct {
	dir, port string
	settings  []string
	process   *exec.Cmd
	exited    chan struct{}
}

func newMosquitto(t *testing.T, settings ...string) *mosquitto {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	_, port, _ := net.SplitHostPort(l.Addr().String())
	if err := l.Close(); err != nil {
		t.Fatal(err)
	}
	return &mosquitto{dir: t.TempDir(), port: port, settings: settings}
}

func (b *mosquitto) url() string { return "mqtt://127.0.0.1:" + b.port }

func (b *mosquitto) file(t *testing.T, name, content string) string {
	t.Helper()
	path := filepath.Join(b.dir, name)
	if err := os.WriteFile(path, []byte(content), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

// start returns when the broker listens. It is stopped at the end of the test
// at the latest.
func (b *mosquitto) start(t *testing.T) {
	t.Helper()
	lines := append([]string{"persistence_location " + b.dir + "/", "max_queued_messages 65000", "listener " + b.port + " 127.0.0.1"}, b.settings...)
	if os.Getuid() == 0 {
		lines = append([]string{"user root"}, lines...) // it would give up the rights to its folder
	}
	config := b.file(t, "mosquitto.conf", strings.Join(lines, "\n")+"\n")
	log, err := os.OpenFile(filepath.Join(b.dir, "log"), os.O_CREATE|os.O_APPEND|os.O_WRONLY, 0o600)
	if err != nil {
		t.Fatal(err)
	}
	defer log.Close()
	b.process = exec.Command(program(t, "mosquitto", "mosquitto"), "-v", "-c", config)
	b.process.Stdout, b.process.Stderr = log, log
	if err := b.process.Start(); err != nil {
		t.Fatal(err)
	}
	exited, process := make(chan struct{}), b.process
	b.exited = exited
	go func() {
		_ = process.Wait() // killed by us; an early end shows below
		close(exited)
	}()
	t.Cleanup(func() { b.stop(t) })
	eventually(t, "mosquitto listens", func() bool {
		select {
		case <-exited:
			text, _ := os.ReadFile(log.Name())
			t.Fatalf("mosquitto ended:\n%s", text)
		default:
		}
		c, err := net.Dial("tcp", "127.0.0.1:"+b.port)
		if err != nil {
			return false
		}
		return c.Close() == nil
	})
}

// stop ends the broker as a service manager does, so that it saves its sessions.
func (b *mosquitto) stop(t *testing.T) {
	t.Helper()
	select {
	case <-b.exited:
		return
	default:
	}
	if err := b.process.Process.Signal(os.Interrupt); err != nil {
		t.Error(err)
	}
	<-b.exited
}

// publish sends payloads to a topic with another program than ours.
func (b *mosquitto) publish(t *testing.T, topic string, payloads ...string) {
	t.Helper()
	c := exec.Command(program(t, "mosquitto_pub", "mosquitto-clients"), "-h", "127.0.0.1", "-p", b.port, "-q", "1", "-t", topic, "-l")
	c.Stdin = strings.NewReader(strings.Join(payloads, "\n") + "\n")
	if out, err := c.CombinedOutput(); err != nil {
		t.Fatalf("mosquitto_pub: %v\n%s", err, out)
	}
}

func counted(from, to int) []string {
	var lines []string
	for i := from; i < to; i++ {
		lines = append(lines, fmt.Sprint(i))
	}
	return lines
}

func wantValues(t *testing.T, batch []Received, from int) {
	t.Helper()
	for i, r := range batch {
		if r.Value != float64(from+i) {
			t.Fatalf("reading %d is %v, want %d", i, r.Value, from+i)
		}
	}
}

func TestUnacknowledgedMessagesReturn(t *testing.T) {
	b := newMosquitto(t, "allow_anonymous true")
	b.start(t)
	tags := []Tag{number("a")}
	first, _, stop := start(t, tags, Options{URL: b.url()})
	ready(t, first)
	b.publish(t, "plant/a", counted(0, 15)...)
	batch := collect(t, first, 15)
	first.Ack(batch[:5])
	stop()                                      // the other ten were never stored
	b.publish(t, "plant/a", counted(15, 20)...) // while we are away
	second, _, stop := start(t, tags, Options{URL: b.url()})
	batch = collect(t, second, 15)
	wantValues(t, batch, 5)
	second.Ack(batch)
	stop()
	third, _, _ := start(t, tags, Options{URL: b.url()})
	ready(t, third)
	b.publish(t, "plant/a", "20")
	wantValues(t, collect(t, third, 1), 20) // nothing acknowledged comes again
}

func TestLostConnectionBringsMessagesAgain(t *testing.T) {
	b := newMosquitto(t, "allow_anonymous true")
	b.start(t)
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: b.url()})
	ready(t, s)
	b.publish(t, "plant/a", counted(0, 10)...)
	old := collect(t, s, 10)
	s.link.Load().Conn.(*net.TCPConn).CloseRead() // as when a link breaks
	again := collect(t, s, 10)
	wantValues(t, again, 0)
	s.Ack(old) // of the lost connection: without effect
	if s.Waiting() != 10 {
		t.Errorf("%d waiting, want the 10 copies", s.Waiting())
	}
	s.Ack(again)
	if st := s.Stats(); s.Waiting() != 0 || st.Losses != 1 || st.Connections != 2 {
		t.Errorf("%d waiting, stats %+v", s.Waiting(), st)
	}
}

func TestBrokerRestart(t *testing.T) {
	for _, persistence := range []string{"true", "false"} {
		t.Run("persistence "+persistence, func(t *testing.T) {
			b := newMosquitto(t, "allow_anonymous true", "persistence "+persistence)
			b.start(t)
			s, _, _ := start(t, []Tag{number("a"), number("b")}, Options{URL: b.url(), ClientID: "restart"})
			ready(t, s)
			b.stop(t)
			eventually(t, "loss seen", func() bool { st := s.Stats(); return st.Losses == 1 && !st.Connected && st.Failures > 0 })
			if s.Stats().LastError == "" {
				t.Error("no error to show while the broker is away")
			}
			b.start(t)
			eventually(t, "connected again", func() bool { return s.Stats().Connections == 2 })
			ready(t, s)
			b.publish(t, "plant/b", counted(0, 5)...)
			wantValues(t, collect(t, s, 5), 0)
		})
	}
}

func TestOverflowKeepsOrder(t *testing.T) {
	b := newMosquitto(t, "allow_anonymous true", "max_inflight_messages 1000")
	b.start(t)
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: b.url(), Buffer: 10, PingTimeout: 200 * time.Millisecond})
	ready(t, s)
	b.publish(t, "plant/a", counted(0, 30)...)
	for i, v := range drainOverflow(t, s, 30) {
		if v != i {
			t.Fatalf("message %d came in place %d", v, i)
		}
	}
}

func TestInFlightWindow(t *testing.T) {
	b := newMosquitto(t, "allow_anonymous true", "max_inflight_messages 20")
	b.start(t)
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: b.url()})
	ready(t, s)
	b.publish(t, "plant/a", counted(0, 200)...)
	var all, batch []Received
	eventually(t, "200 readings", func() bool {
		batch = s.Take(batch[:0])
		all = append(all, batch...)
		if s.Waiting() >= 16 || len(all) == 200 {
			s.Ack(all) // again for those before: without effect
		}
		return len(all) == 200
	})
	wantValues(t, all, 0)
}

func TestWrongPassword(t *testing.T) {
	b := newMosquitto(t)
	users := b.file(t, "users", "ann:right\n")
	if out, err := exec.Command(program(t, "mosquitto_passwd", "mosquitto"), "-U", users).CombinedOutput(); err != nil {
		t.Fatalf("mosquitto_passwd: %v\n%s", err, out)
	}
	b.settings = []string{"allow_anonymous false", "password_file " + users}
	b.start(t)
	password := make(chan string, 1)
	password <- "wrong"
	s, log, _ := start(t, []Tag{number("a")}, Options{URL: b.url(), Username: "ann", Password: func() (string, error) {
		p := <-password
		password <- p
		return p, nil
	}})
	eventually(t, "3 failures", func() bool { return s.Stats().Failures >= 3 })
	if got := s.Stats(); got.Connected || !strings.Contains(got.LastError, `refuses user "ann"`) || strings.Contains(got.LastError, "wrong") {
		t.Errorf("stats %+v; want the user named and the password not", got)
	}
	if got := log.count("cannot connect"); got != 1 {
		t.Errorf("logged %d times, want once for the same error", got)
	}
	<-password
	password <- "right" // corrected without a restart
	ready(t, s)
}

// The two throw each other out until one stops.
func TestTwoClientsWithOneID(t *testing.T) {
	b := newMosquitto(t, "allow_anonymous true")
	b.start(t)
	s, log, _ := start(t, []Tag{number("a")}, Options{URL: b.url(), ClientID: "same"})
	_, other, stop := start(t, []Tag{number("a")}, Options{URL: b.url(), ClientID: "same"})
	const warning = "another client uses this id"
	eventually(t, "a warning", func() bool { return log.count(warning)+other.count(warning) > 0 })
	stop()
	ready(t, s)
}

func TestTLSWithMosquitto(t *testing.T) {
	a := plantAuthority(t)
	b := newMosquitto(t, "allow_anonymous true", "cafile "+a.Path("ca.pem"), "certfile "+a.Path("broker.pem"),
		"keyfile "+a.Path("broker.key"), "require_certificate true")
	b.start(t)
	checkTLS(t, a, "mqtts://127.0.0.1:"+b.port)
}
