package ingest

import (
	"errors"
	"io"
	"net"
	"strings"
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
