package rough

import (
	"bytes"
	"errors"
	"io"
	"net"
	"os"
	"testing"
	"time"

	"go.uber.org/goleak"
)

func TestMain(m *testing.M) { goleak.VerifyTestMain(m) }

// echo answers with what it is sent.
func echo(t *testing.T) (address string) {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { l.Close() })
	go func() {
		for {
			c, err := l.Accept()
			if err != nil {
				return
			}
			go func() {
				defer c.Close()
				_, _ = io.Copy(c, c)
			}()
		}
	}()
	return l.Addr().String()
}

func road(t *testing.T) (*Road, net.Conn) {
	t.Helper()
	r, err := Open(echo(t))
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := r.Close(); err != nil {
			t.Error(err)
		}
	})
	c, err := net.Dial("tcp", r.Address())
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { c.Close() })
	return r, c
}

// there sends n bytes and returns how long it took until all were back.
func there(t *testing.T, c net.Conn, n int) time.Duration {
	t.Helper()
	begun := time.Now()
	sent := bytes.Repeat([]byte("x"), n)
	if _, err := c.Write(sent); err != nil {
		t.Fatal(err)
	}
	back := make([]byte, n)
	if _, err := io.ReadFull(c, back); err != nil || !bytes.Equal(back, sent) {
		t.Fatalf("%v, %d bytes back", err, n)
	}
	return time.Since(begun)
}

func TestDelayAndDrip(t *testing.T) {
	r, c := road(t)
	there(t, c, 100_000)
	r.Delay(50 * time.Millisecond)
	if got := there(t, c, 1); got < 100*time.Millisecond {
		t.Errorf("there and back in %v; want two delays of 50 ms", got)
	}
	r.Delay(0)
	r.Drip(1000)
	if got := there(t, c, 200); got < 200*time.Millisecond {
		t.Errorf("200 bytes in %v; want 0.2 s at 1000 a second", got)
	}
}

func TestFreeze(t *testing.T) {
	r, c := road(t)
	there(t, c, 1)
	r.Freeze(true)
	if _, err := c.Write([]byte("x")); err != nil {
		t.Fatal(err)
	}
	if err := c.SetReadDeadline(time.Now().Add(50 * time.Millisecond)); err != nil {
		t.Fatal(err)
	}
	if _, err := c.Read(make([]byte, 1)); !errors.Is(err, os.ErrDeadlineExceeded) {
		t.Errorf("frozen: %v; want nothing to come and nothing to end", err)
	}
	r.Freeze(false)
	if err := c.SetReadDeadline(time.Time{}); err != nil {
		t.Fatal(err)
	}
	if _, err := c.Read(make([]byte, 1)); err != nil {
		t.Errorf("thawed: %v", err)
	}
}

func TestShutAndReset(t *testing.T) {
	r, c := road(t)
	there(t, c, 1)
	r.Shut(true)
	if _, err := c.Read(make([]byte, 1)); err == nil {
		t.Error("the connection goes on")
	}
	again, err := net.Dial("tcp", r.Address())
	if err != nil {
		t.Fatal(err)
	}
	defer again.Close()
	if _, err := again.Read(make([]byte, 1)); err == nil {
		t.Error("a new connection goes through")
	}
	r.Shut(false)
	last, err := net.Dial("tcp", r.Address())
	if err != nil {
		t.Fatal(err)
	}
	defer last.Close()
	there(t, last, 1)
}
