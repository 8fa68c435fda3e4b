package ingest

import (
	"bufio"
	"bytes"
	"errors"
	"io"
	"net"
	"strings"
	"testing"
	"testing/iotest"
	"time"

	"github.com/eclipse/paho.mqtt.golang/packets"
)

func encoded(t testing.TB, p packets.ControlPacket) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := p.Write(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func message311(topic string, payload []byte) *packets.PublishPacket {
	p := packets.NewControlPacket(packets.Publish).(*packets.PublishPacket)
	p.TopicName, p.Payload, p.Qos, p.MessageID = topic, payload, 1, 7
	return p
}

func TestPacketsPassUnchanged(t *testing.T) {
	var stream []byte
	for _, size := range []int{0, 1, 100, 128, 16384, MaxPayload, MaxPayload + 1} {
		stream = append(stream, encoded(t, message311("a/b", bytes.Repeat([]byte("x"), size)))...)
		stream = append(stream, encoded(t, packets.NewControlPacket(packets.Pingresp))...)
	}
	for name, r := range map[string]io.Reader{
		"whole": bytes.NewReader(stream), "by the byte": iotest.OneByteReader(bytes.NewReader(stream)),
	} {
		got, err := io.ReadAll(&clipper{r: bufio.NewReader(r)})
		if err != nil || !bytes.Equal(got, stream) {
			t.Errorf("%s: %d bytes, %v; want the same %d bytes", name, len(got), err, len(stream))
		}
	}
}

func TestHugeMessageIsCut(t *testing.T) {
	for _, topic := range []string{"a", strings.Repeat("t", maxTopic)} {
		stream := encoded(t, message311(topic, make([]byte, 3<<20)))
		stream = append(stream, encoded(t, message311("next", []byte("5")))...)
		c := &clipper{r: bufio.NewReader(bytes.NewReader(stream))}
		first, err := packets.ReadPacket(c)
		if err != nil {
			t.Fatal(err)
		}
		p := first.(*packets.PublishPacket)
		if p.TopicName != topic || p.MessageID != 7 || len(p.Payload) <= MaxPayload || len(p.Payload) > maxPacket {
			t.Errorf("topic of %d bytes, id %d, payload of %d bytes; want whole topic, id 7, just over %d", len(p.TopicName), p.MessageID, len(p.Payload), MaxPayload)
		}
		second, err := packets.ReadPacket(c)
		if err != nil || string(second.(*packets.PublishPacket).Payload) != "5" {
			t.Errorf("the packet after it: %v, %v", second, err)
		}
	}
}

func TestBrokenFrames(t *testing.T) {
	for name, stream := range map[string]string{
		"five length bytes":     "\x30\xff\xff\xff\xff\x01",
		"ends in the length":    "\x30\xff",
		"ends in the body":      "\x30\x05ab",
		"huge but no PUBLISH":   "\x90\xff\xff\xff\x7f",
		"ends in the rest left": "\x30\xff\xff\xff\x7f" + strings.Repeat("x", maxPacket),
	} {
		c := &clipper{r: bufio.NewReader(strings.NewReader(stream))}
		var err error
		for err == nil {
			_, err = packets.ReadPacket(c)
		}
		if err == nil || errors.Is(err, io.ErrNoProgress) {
			t.Errorf("%s: %v; want an error", name, err)
		}
	}
}

// FuzzClipper claims: whatever comes, the library is never told of a packet
// longer than maxPacket, and short packets pass unchanged.
func FuzzClipper(f *testing.F) {
	f.Add([]byte("\x30\x05\x00\x01a12\xd0\x00"))
	f.Add([]byte("\x30\xff\xff\xff\x7f"))
	f.Fuzz(func(t *testing.T, stream []byte) {
		c := &clipper{r: bufio.NewReaderSize(bytes.NewReader(stream), 16)}
		var got []byte
		for {
			var b [3]byte
			n, err := c.Read(b[:])
			got = append(got, b[:n]...)
			if c.body > maxPacket {
				t.Fatalf("a packet of %d bytes", c.body)
			}
			if err != nil {
				break
			}
		}
		// An over-long encoding of a short length is the one thing rewritten.
		if len(got) > len(stream) {
			t.Errorf("%d bytes out of %d", len(got), len(stream))
		}
	})
}

func TestWriteGivesUp(t *testing.T) {
	near, far := net.Pipe()
	defer near.Close()
	defer far.Close()
	_, err := newLink(near, 10*time.Millisecond).Write([]byte("x"))
	var timeout net.Error
	if !errors.As(err, &timeout) || !timeout.Timeout() {
		t.Errorf("writing to a peer that does not read: %v; want a timeout", err)
	}
}

func TestEndedLinkTellsWhy(t *testing.T) {
	near, far := net.Pipe()
	defer near.Close()
	defer far.Close()
	l := newLink(near, time.Second)
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
	conn := newLink(near, time.Second)
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
