package ingest

import (
	"bufio"
	"bytes"
	"errors"
	"io"
	"strings"
	"testing"
	"testing/iotest"

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

// welcome is how every connection begins.
const welcome = "\x20\x02\x00\x00"

// through lets a stream flow in, and returns the packets that were passed on and
// copies of the messages.
func through(r io.Reader) (passed []byte, messages []delivery, err error) {
	f := &inflow{r: bufio.NewReaderSize(r, readBuffer), deliver: func(d *delivery) {
		c := *d
		c.topic, c.payload = bytes.Clone(d.topic), bytes.Clone(d.payload)
		messages = append(messages, c)
	}, confirm: func(uint16) {}}
	passed, err = io.ReadAll(f)
	return passed, messages, err
}

// What is delivered is held against what the client library reads from the same bytes.
func TestMessagesAreTakenOut(t *testing.T) {
	want := []byte(welcome)
	stream := bytes.Clone(want)
	var sent []*packets.PublishPacket
	for i, size := range []int{0, 1, 100, 128, 16384, MaxPayload - 100, MaxPayload, MaxPayload + 1} {
		m := message311("a/b", bytes.Repeat([]byte("x"), size))
		m.Qos, m.Retain, m.Dup, m.MessageID = byte(i%3), i%2 == 0, i == 4, uint16(1000*i)
		sent = append(sent, m)
		stream = append(stream, encoded(t, m)...)
		other := encoded(t, packets.NewControlPacket(packets.Pingresp))
		want, stream = append(want, other...), append(stream, other...)
	}
	for name, r := range map[string]io.Reader{
		"whole": bytes.NewReader(stream), "by the byte": iotest.OneByteReader(bytes.NewReader(stream)),
	} {
		passed, messages, err := through(r)
		if err != nil || !bytes.Equal(passed, want) || len(messages) != len(sent) {
			t.Fatalf("%s: passed on %q with %d messages, %v; want %q with %d", name, passed, len(messages), err, want, len(sent))
		}
		for i, m := range messages {
			if p := sent[i]; string(m.topic) != p.TopicName || !bytes.Equal(m.payload, p.Payload) || m.qos != p.Qos || m.retained != p.Retain || (m.qos > 0 && m.id != p.MessageID) {
				t.Errorf("%s: message %d is on %q, %d bytes, qos %d, retained %v, id %d; want %v", name, i, m.topic, len(m.payload), m.qos, m.retained, m.id, p)
			}
		}
	}
}

// A long message on a slow line answers probes while it comes, at every byte: where it
// fits the buffer, where it does not, and where it is only left out.
func TestWhatComesOfAMessageAnswersProbes(t *testing.T) {
	for _, size := range []int{100, MaxPayload, 3 * maxPacket} {
		stream := append([]byte(welcome), encoded(t, message311("a", make([]byte, size)))...)
		got := 0
		f := &inflow{deliver: func(d *delivery) { got++ }}
		f.r = bufio.NewReaderSize(iotest.OneByteReader(bytes.NewReader(stream)), readBuffer)
		if _, err := io.ReadFull(f, make([]byte, len(welcome))); err != nil {
			t.Fatal(err)
		}
		answers := 0
		for ; ; answers++ {
			f.probed.Store(true)
			var b [2]byte
			if _, err := io.ReadFull(f, b[:]); errors.Is(err, io.EOF) {
				break
			} else if err != nil || b != [2]byte{pingresp << 4, 0} {
				t.Fatalf("%d bytes: read %x, %v after %d answers", size, b, err, answers)
			}
		}
		if got != 1 || answers < size {
			t.Errorf("%d bytes: %d messages, %d answers; want 1 and an answer for each byte", size, got, answers)
		}
	}
}

// A message is nothing to begin with; the library knows what is.
func TestFirstPacketIsPassedOn(t *testing.T) {
	stream := encoded(t, message311("a", []byte("5")))
	passed, messages, err := through(bytes.NewReader(stream))
	if err != nil || !bytes.Equal(passed, stream) || len(messages) != 0 {
		t.Errorf("passed on %q, delivered %v, %v; want all passed on", passed, messages, err)
	}
}

func TestHugeMessageIsCut(t *testing.T) {
	for _, topic := range []string{"a", strings.Repeat("t", maxTopic)} {
		stream := append([]byte(welcome), encoded(t, message311(topic, make([]byte, 3<<20)))...)
		stream = append(stream, encoded(t, message311("next", []byte("5")))...)
		_, messages, err := through(bytes.NewReader(stream))
		if err != nil || len(messages) != 2 {
			t.Fatalf("%d messages, %v; want 2", len(messages), err)
		}
		if m := messages[0]; string(m.topic) != topic || m.id != 7 || len(m.payload) <= MaxPayload || len(m.payload) > maxPacket {
			t.Errorf("topic of %d bytes, id %d, payload of %d bytes; want whole topic, id 7, just over %d", len(m.topic), m.id, len(m.payload), MaxPayload)
		}
		if m := messages[1]; string(m.topic) != "next" || string(m.payload) != "5" {
			t.Errorf("the message after it: %q on %q", m.payload, m.topic)
		}
	}
}

func TestBrokenFrames(t *testing.T) {
	for name, stream := range map[string]string{
		"five length bytes":     "\x30\xff\xff\xff\xff\x01",
		"ends in the length":    "\x30\xff",
		"ends in the body":      "\x30\x05ab",
		"no body":               "\x30\x00",
		"ends in the topic":     "\x30\x04\x00\x03ab",
		"ends in the id":        "\x32\x04\x00\x01a\x00",
		"quality of service 3":  "\x36\x05\x00\x01a\x00\x07",
		"huge but no PUBLISH":   "\x90\xff\xff\xff\x7f",
		"ends in the rest left": "\x30\xff\xff\xff\x7f" + strings.Repeat("\x00", maxPacket),
	} {
		passed, messages, err := through(strings.NewReader(welcome + stream))
		if err == nil || errors.Is(err, io.ErrNoProgress) || string(passed) != welcome {
			t.Errorf("%s: %v, after %q; want an error after %q", name, err, passed, welcome)
		}
		if len(messages) > 0 && name != "ends in the rest left" {
			t.Errorf("%s: delivered %v", name, messages)
		}
	}
}

// The packets that answer: MQTT 3.1.1, figures 3.14 and 3.15, by the library's encoder.
func TestAnswers(t *testing.T) {
	puback := packets.NewControlPacket(packets.Puback).(*packets.PubackPacket)
	pubrec := packets.NewControlPacket(packets.Pubrec).(*packets.PubrecPacket)
	puback.MessageID, pubrec.MessageID = 0xabcd, 0xabcd
	for qos, want := range map[byte]packets.ControlPacket{1: puback, 2: pubrec} {
		if got := (&delivery{qos: qos, id: 0xabcd}).answer(); !bytes.Equal(got[:], encoded(t, want)) {
			t.Errorf("to quality of service %d: %x, want %x", qos, got, encoded(t, want))
		}
	}
}

// FuzzInflow claims: whatever comes, no message is longer than maxPacket, the library is
// never told of a packet longer than that, and all that comes out came in.
func FuzzInflow(f *testing.F) {
	f.Add([]byte("\x30\x05\x00\x01a12\xd0\x00"))
	f.Add([]byte("\x20\x02\x00\x00\x32\x07\x00\x01a\x00\x0712\xd0\x00"))
	f.Add([]byte("\x20\x02\x00\x00\x40\x02\xff\xff\x40\x03\x00\x01\x02"))
	f.Add([]byte("\x30\xff\xff\xff\x7f"))
	f.Fuzz(func(t *testing.T, stream []byte) {
		out := 0
		flow := &inflow{r: bufio.NewReaderSize(bytes.NewReader(stream), 16), deliver: func(d *delivery) {
			if out += 2 + len(d.topic) + len(d.payload); len(d.topic)+len(d.payload) > maxPacket {
				t.Fatalf("a message of %d and %d bytes", len(d.topic), len(d.payload))
			}
		}, confirm: func(uint16) { out += 4 }}
		for {
			var b [3]byte
			n, err := flow.Read(b[:])
			out += n
			if flow.body > maxPacket {
				t.Fatalf("a packet of %d bytes", flow.body)
			}
			if err != nil {
				break
			}
		}
		// An over-long encoding of a short length is the one thing rewritten.
		if out > len(stream) {
			t.Errorf("%d bytes out of %d", out, len(stream))
		}
	})
}
