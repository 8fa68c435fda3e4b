package ingest

import (
	"bytes"
	"fmt"
	"net"
	"runtime"
	"sync/atomic"
	"testing"
	"time"

	"github.com/eclipse/paho.mqtt.golang/packets"
)

// hostile is a broker that lets a client in, grants what it asks for, and then does as it
// likes. What comes from the client is read and counted.
func hostile(t *testing.T, act func(net.Conn)) (url string, acknowledged *atomic.Int64) {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { l.Close() })
	acknowledged = new(atomic.Int64)
	go func() {
		for {
			c, err := l.Accept()
			if err != nil {
				return
			}
			go welcomed(c, act, acknowledged)
		}
	}()
	return "mqtt://" + l.Addr().String(), acknowledged
}

func welcomed(c net.Conn, act func(net.Conn), acknowledged *atomic.Int64) {
	defer c.Close()
	for {
		p, err := packets.ReadPacket(c)
		if err != nil {
			return
		}
		switch p := p.(type) {
		case *packets.ConnectPacket:
			err = connack(packets.Accepted).Write(c)
		case *packets.SubscribePacket:
			err = suback(p, 1).Write(c)
			go act(c)
		case *packets.PubackPacket:
			acknowledged.Add(1)
		case *packets.PingreqPacket:
			err = packets.NewControlPacket(packets.Pingresp).Write(c)
		}
		if err != nil {
			return
		}
	}
}

// inUse is what the program holds in memory, bytes.
func inUse() uint64 {
	runtime.GC()
	var m runtime.MemStats
	runtime.ReadMemStats(&m)
	return m.HeapAlloc
}

// sent writes packets made by the number, until the connection ends.
func sent(c net.Conn, n int, packet func(i int) *packets.PublishPacket) {
	var b bytes.Buffer
	for i := range n {
		_ = packet(i).Write(&b) // to memory
		if b.Len() > 1<<16 || i == n-1 {
			if _, err := c.Write(b.Bytes()); err != nil {
				return
			}
			b.Reset()
		}
	}
}

// A flood of whatever kind is bounded in memory, and every message of it is in a counter.
func TestFloods(t *testing.T) {
	for name, tt := range map[string]struct {
		messages int
		packet   func(i int) *packets.PublishPacket
		count    func(Stats) uint64
		acked    int64
		most     uint64 // bytes held more than before
	}{
		"payloads of a megabyte": {100, func(i int) *packets.PublishPacket {
			p := message311("plant/a", make([]byte, 1<<20))
			p.MessageID = uint16(i + 1)
			return p
		}, func(s Stats) uint64 { return s.Tags[0].Refused[TooLarge] }, 100, 4 << 20},
		"a hundred thousand topics": {100_000, func(i int) *packets.PublishPacket {
			p := message311(fmt.Sprintf("stranger/%d", i), []byte("1"))
			p.Qos = 0
			return p
		}, func(s Stats) uint64 { return s.UnknownTopic }, 0, 8 << 20},
		"readings that nobody takes": {100_000, func(int) *packets.PublishPacket {
			p := message311("plant/a", []byte("1"))
			p.Qos = 0
			return p
		}, func(s Stats) uint64 { return s.Tags[0].Accepted + s.Tags[0].Refused[Overflow] }, 0, 4 << 20},
		"payloads that are no numbers": {50_000, func(i int) *packets.PublishPacket {
			p := message311("plant/a", []byte("NaN?"))
			p.MessageID = uint16(i%65535 + 1)
			return p
		}, func(s Stats) uint64 { return s.Tags[0].Refused[NotANumber] }, 50_000, 8 << 20},
	} {
		t.Run(name, func(t *testing.T) {
			url, acknowledged := hostile(t, func(c net.Conn) { sent(c, tt.messages, tt.packet) })
			before := inUse()
			s, _, _ := start(t, []Tag{number("a")}, Options{URL: url, Buffer: 1000, PingTimeout: 500 * time.Millisecond})
			eventually(t, "all counted", func() bool { return tt.count(s.Stats()) == uint64(tt.messages) })
			eventually(t, "acknowledgements", func() bool { return acknowledged.Load() == tt.acked })
			if now := inUse(); now > before+tt.most {
				t.Errorf("holds %d bytes more than before; want %d at most", now-before, tt.most)
			}
			if st := s.Stats(); st.Losses != 0 || !st.Connected {
				t.Errorf("%+v; want the connection to stand", st)
			}
		})
	}
}

// One identifier again and again, unacknowledged, is one message that waits.
func TestReusedIdentifiers(t *testing.T) {
	const messages = 20_000
	url, _ := hostile(t, func(c net.Conn) {
		sent(c, messages, func(int) *packets.PublishPacket { return message311("plant/a", []byte("1")) })
		sent(c, 1, func(int) *packets.PublishPacket {
			p := message311("plant/end", nil)
			p.Qos = 0
			return p
		})
	})
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: url, Buffer: messages + 1})
	eventually(t, "the end of it", func() bool { return s.Stats().UnknownTopic == 1 })
	if got := s.Waiting(); got != 1 {
		t.Errorf("%d messages wait, want 1", got)
	}
}

// A message that never ends, a byte now and then, does not keep a connection: probes are
// answered while it comes, but not for ever.
func TestMessageThatNeverEnds(t *testing.T) {
	url, _ := hostile(t, func(c net.Conn) {
		tick := time.NewTicker(20 * time.Millisecond)
		defer tick.Stop()
		piece := []byte("\x30\xff\xff\xff\x7f\x00\x07plant/a")
		for {
			if _, err := c.Write(piece); err != nil {
				return
			}
			piece = []byte("1")
			<-tick.C
		}
	})
	s, log, _ := start(t, []Tag{number("a")}, Options{URL: url, KeepAlive: time.Second, PingTimeout: 2 * time.Second, ConnectTimeout: 100 * time.Millisecond})
	eventually(t, "a loss", func() bool { return s.Stats().Losses > 0 })
	eventually(t, "a line in the log", func() bool { return log.count("message of 268435455 bytes has not come to its end") > 0 })
	if got := s.Stats().Tags[0]; got.Accepted != 0 || got.Refused != (Counts{}) {
		t.Errorf("%+v; want nothing of a message that did not end", got)
	}
}
