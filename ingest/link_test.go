package ingest

import (
	"errors"
	"io"
	"net"
	"runtime"
	"strings"
	"sync"
	"sync/atomic"
	"testing"
	"time"
)

// unwanted is for links that deliver nothing.
func unwanted(t *testing.T) func(*link, *delivery) {
	return func(_ *link, d *delivery) { t.Errorf("delivered %+v", d) }
}

func TestWriteGivesUp(t *testing.T) {
	near, far := net.Pipe()
	defer near.Close()
	defer far.Close()
	l := newLink(near, 10*time.Millisecond, unwanted(t))
	_, err := l.Write([]byte("x"))
	var timeout net.Error
	if !errors.As(err, &timeout) || !timeout.Timeout() {
		t.Errorf("writing to a peer that does not read: %v; want a timeout", err)
	}
	go io.Copy(io.Discard, far)
	if n, again := l.Write([]byte("x")); n != 0 || again != err {
		t.Errorf("after a write that may have ended within a packet: %d bytes written, %v; want none, and the same error", n, again)
	}
}

// The library, which reads, then finds that the connection has ended.
func TestAcknowledgementThatCannotBeSentEndsTheLink(t *testing.T) {
	near, far := net.Pipe()
	defer near.Close()
	defer far.Close()
	l := newLink(near, 10*time.Millisecond, unwanted(t))
	l.acknowledge([]byte("\x40\x02\x00\x07"))
	var timeout net.Error
	if _, err := l.Read(make([]byte, 1)); !errors.As(err, &timeout) || !strings.Contains(err.Error(), "acknowledge") {
		t.Errorf("reading on: %v; want the timeout of the acknowledgement", err)
	}
}

func TestEndedLinkTellsWhy(t *testing.T) {
	near, far := net.Pipe()
	defer near.Close()
	defer far.Close()
	l := newLink(near, time.Second, unwanted(t))
	l.end(errLeft)
	l.end(io.ErrUnexpectedEOF)
	if _, err := l.Read(make([]byte, 1)); !errors.Is(err, errLeft) {
		t.Errorf("got %v; want the first reason given", err)
	}
}

// Bytes that we have not read must not cost the broker what we sent last.
func TestGoodbyeIsReadToTheEnd(t *testing.T) {
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	near, err := net.Dial("tcp", l.Addr().String())
	if err != nil {
		t.Fatal(err)
	}
	far, err := l.Accept()
	if err != nil {
		t.Fatal(err)
	}
	defer far.Close()
	if _, err := far.Write(make([]byte, 1000)); err != nil {
		t.Fatal(err)
	}
	conn := newLink(near, time.Second, unwanted(t))
	conn.parting.Store(true)
	last := strings.Repeat("acknowledged", 1000)
	if _, err := conn.Write([]byte(last)); err != nil {
		t.Fatal(err)
	}
	closed := make(chan error, 2)
	for range 2 {
		go func() { closed <- conn.Close() }()
	}
	got, err := io.ReadAll(far)
	if err != nil || string(got) != last {
		t.Errorf("the other side read %d bytes, %v; want all %d", len(got), err, len(last))
	}
	select {
	case err := <-closed:
		t.Errorf("closed (%v) before the other side had", err)
	default:
	}
	far.Close()
	for range 2 {
		if err := <-closed; err != nil {
			t.Error(err)
		}
	}
}

// At the goodbye two read from one connection, so each finds but parts of the stream.
func TestNothingIsDeliveredAfterTheGoodbye(t *testing.T) {
	near, far := net.Pipe()
	defer near.Close()
	l := newLink(near, time.Second, unwanted(t))
	l.parting.Store(true)
	go func() {
		_, _ = io.WriteString(far, welcome+"\x30\x04\x00\x01a5") // the other side reads it, or the test fails
		far.Close()
	}()
	if got, err := io.ReadAll(l); err != nil || string(got) != welcome {
		t.Errorf("passed on %q, %v; want the welcome alone", got, err)
	}
}

// Each write has its own limit: none is set, by whomever, while another writes.
func TestWritesDoNotPutOffEachOthersLimit(t *testing.T) {
	c := &limited{}
	l := newLink(c, time.Second, unwanted(t))
	var writers sync.WaitGroup
	for range 4 {
		writers.Go(func() {
			for range 100 {
				l.acknowledge([]byte("\x40\x02\x00\x07"))
				_, wrong := l.Write([]byte("\xc0\x00"))
				if err := errors.Join(wrong, l.SetWriteDeadline(time.Time{})); err != nil {
					t.Error(err)
				}
			}
		})
	}
	writers.Wait()
	if got := c.disturbed.Load(); got > 0 {
		t.Errorf("the limit was set %d times while somebody wrote", got)
	}
}

func TestNothingFollowsTheGoodbye(t *testing.T) {
	near, far := net.Pipe()
	defer far.Close()
	l := newLink(near, time.Second, unwanted(t))
	go func() {
		defer near.Close()
		l.acknowledge([]byte("before"))
		if _, err := l.Write([]byte("\xe0\x00")); err != nil {
			t.Error(err)
		}
		l.acknowledge([]byte("after"))
	}()
	if got, err := io.ReadAll(far); err != nil || string(got) != "before\xe0\x00" {
		t.Errorf("sent %q, %v; want what was before the goodbye, and that", got, err)
	}
}

// What TLS writes while it reads must not meet the limit of a write long ago.
func TestWriteLeavesNoLimitBehind(t *testing.T) {
	c := &limited{}
	l := newLink(c, time.Second, unwanted(t))
	if _, err := l.Write([]byte("x")); err != nil || c.unlimited.Load() || c.limit.Load() {
		t.Errorf("%v; without a limit while writing: %t; with one afterwards: %t", err, c.unlimited.Load(), c.limit.Load())
	}
}

// limited watches over the limit of what is written.
type limited struct {
	net.Conn
	limit, writing, unlimited atomic.Bool
	disturbed                 atomic.Int32
}

func (c *limited) Write(p []byte) (int, error) {
	c.writing.Store(true)
	defer c.writing.Store(false)
	runtime.Gosched()
	if !c.limit.Load() {
		c.unlimited.Store(true)
	}
	return len(p), nil
}

func (c *limited) SetWriteDeadline(t time.Time) error {
	if c.writing.Load() {
		c.disturbed.Add(1)
	}
	c.limit.Store(!t.IsZero())
	return nil
}
