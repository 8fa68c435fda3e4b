package ingest

import (
	"errors"
	"net"
	"strings"
	"sync/atomic"
	"testing"
	"time"

	"github.com/eclipse/paho.mqtt.golang/packets"
)

// stub is a broker that answers each packet as a test says: with a packet, not at
// all (nil), or by hanging up.
func stub(t *testing.T, answer func(packets.ControlPacket) packets.ControlPacket) (url string) {
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
			go talk(c, answer)
		}
	}()
	return "mqtt://" + l.Addr().String()
}

func talk(c net.Conn, answer func(packets.ControlPacket) packets.ControlPacket) {
	defer c.Close()
	for {
		p, err := packets.ReadPacket(c)
		if err != nil {
			return
		}
		if _, bye := p.(*packets.DisconnectPacket); bye {
			return
		}
		a := answer(p)
		if a == hangUp || (a != nil && a.Write(c) != nil) {
			return
		}
	}
}

var hangUp = packets.NewControlPacket(packets.Disconnect)

func connack(code byte) packets.ControlPacket {
	p := packets.NewControlPacket(packets.Connack).(*packets.ConnackPacket)
	p.ReturnCode = code
	return p
}

func suback(to *packets.SubscribePacket, code byte) packets.ControlPacket {
	p := packets.NewControlPacket(packets.Suback).(*packets.SubackPacket)
	p.MessageID = to.MessageID
	for range to.Topics {
		p.ReturnCodes = append(p.ReturnCodes, code)
	}
	return p
}

func TestRefusedConnections(t *testing.T) {
	for code, want := range map[byte]string{
		packets.ErrRefusedBadProtocolVersion:    "does not speak MQTT 3.1.1",
		packets.ErrRefusedIDRejected:            `refuses client id "`,
		packets.ErrRefusedServerUnavailable:     "not available",
		packets.ErrRefusedBadUsernameOrPassword: "check user name, password",
		packets.ErrRefusedNotAuthorised:         "refuses a client without a user name with client id",
	} {
		t.Run(want, func(t *testing.T) {
			url := stub(t, func(packets.ControlPacket) packets.ControlPacket { return connack(code) })
			s, _, _ := start(t, []Tag{number("a")}, Options{URL: url})
			eventually(t, "a failure", func() bool { return s.Stats().Failures > 0 })
			if got := s.Stats().LastError; !strings.Contains(got, want) {
				t.Errorf("code %d: %q; want it to say %q", code, got, want)
			}
		})
	}
}

func TestPeerThatIsNoBroker(t *testing.T) {
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	go func() {
		for {
			c, err := l.Accept()
			if err != nil {
				return
			}
			_, err = c.Write([]byte("HTTP/1.1 400 Bad Request\r\n\r\n"))
			if err = errors.Join(err, c.Close()); err != nil {
				return
			}
		}
	}()
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: "mqtt://" + l.Addr().String()})
	eventually(t, "failures", func() bool { return s.Stats().Failures > 1 })
	if st := s.Stats(); st.Connected || st.LastError == "" {
		t.Errorf("stats %+v; want an error", st)
	}
}

func TestLoweredQoS(t *testing.T) {
	url := stub(t, func(p packets.ControlPacket) packets.ControlPacket {
		switch p := p.(type) {
		case *packets.ConnectPacket:
			return connack(packets.Accepted)
		case *packets.SubscribePacket:
			return suback(p, 0)
		}
		return nil
	})
	s, log, _ := start(t, []Tag{number("a")}, Options{URL: url})
	ready(t, s)
	eventually(t, "a warning", func() bool { return log.count("lower quality of service") == 1 })
}

// The client must give itself as it should: fixed id, the session kept,
// MQTT 3.1.1, keep-alive 5 s, QoS 1.
func TestWhatIsSent(t *testing.T) {
	var connect atomic.Pointer[packets.ConnectPacket]
	var subscribe atomic.Pointer[packets.SubscribePacket]
	url := stub(t, func(p packets.ControlPacket) packets.ControlPacket {
		switch p := p.(type) {
		case *packets.ConnectPacket:
			connect.Store(p)
			return connack(packets.Accepted)
		case *packets.SubscribePacket:
			subscribe.Store(p)
			return suback(p, 1)
		}
		return nil
	})
	o := Options{URL: url, ClientID: "brackwater", Username: "ann", Password: func() (string, error) { return "pw", nil }}
	s, _, _ := start(t, []Tag{number("a"), number("a")}, o)
	ready(t, s)
	c, sub := connect.Load(), subscribe.Load()
	if c.CleanSession || c.ClientIdentifier != "brackwater" || c.Keepalive != 5 || c.ProtocolVersion != 4 || c.Username != "ann" || string(c.Password) != "pw" {
		t.Errorf("connected with %v", c)
	}
	if len(sub.Topics) != 1 || sub.Topics[0] != "plant/a" || sub.Qoss[0] != 1 {
		t.Errorf("subscribed to %v with %v; want plant/a once with 1", sub.Topics, sub.Qoss)
	}
}

func TestUnansweredSubscribeIsTriedAgain(t *testing.T) {
	var asked atomic.Int32
	url := stub(t, func(p packets.ControlPacket) packets.ControlPacket {
		switch p := p.(type) {
		case *packets.ConnectPacket:
			return connack(packets.Accepted)
		case *packets.SubscribePacket:
			if asked.Add(1) > 1 {
				return suback(p, 1)
			}
		}
		return nil
	})
	s, log, _ := start(t, []Tag{number("a")}, Options{URL: url, ConnectTimeout: 100 * time.Millisecond})
	ready(t, s)
	// The loss is told in a goroutine of its own, which the next connection does not wait for.
	eventually(t, "a line in the log", func() bool { return log.count("no answer for 100ms") > 0 })
	if st := s.Stats(); st.Connections < 2 {
		t.Errorf("stats %+v; want a second connection", st)
	}
}

// A peer that says nothing more, as behind a dead link, is found out by the
// probe: keep-alive and answer time, each rounded up by the client library.
func TestSilentLinkIsFound(t *testing.T) {
	url := stub(t, func(p packets.ControlPacket) packets.ControlPacket {
		switch p := p.(type) {
		case *packets.ConnectPacket:
			return connack(packets.Accepted)
		case *packets.SubscribePacket:
			return suback(p, 1)
		}
		return nil
	})
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: url, KeepAlive: time.Second, PingTimeout: 100 * time.Millisecond})
	eventually(t, "loss and reconnection", func() bool { st := s.Stats(); return st.Losses > 0 && st.Connections > 1 })
}

// A broker that is busy sending has its answer to a probe behind all that; what it sends
// shows that it is there. The library sends no second probe before an answer to the first.
func TestMessagesAnswerProbes(t *testing.T) {
	var probes atomic.Int32
	url := stub(t, func(p packets.ControlPacket) packets.ControlPacket {
		switch p := p.(type) {
		case *packets.ConnectPacket:
			return connack(packets.Accepted)
		case *packets.SubscribePacket:
			return suback(p, 1)
		case *packets.PingreqPacket:
			probes.Add(1)
			return message311("plant/a", []byte("5"))
		}
		return nil
	})
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: url, KeepAlive: time.Second, PingTimeout: 100 * time.Millisecond})
	eventually(t, "a third probe", func() bool { return probes.Load() > 2 })
	if st := s.Stats(); st.Losses != 0 || st.Tags[0].Accepted < 2 {
		t.Errorf("stats %+v; want no loss", st)
	}
}

func TestRepeatedLossesAreExplained(t *testing.T) {
	url := stub(t, func(p packets.ControlPacket) packets.ControlPacket {
		if _, ok := p.(*packets.ConnectPacket); ok {
			return connack(packets.Accepted)
		}
		return hangUp
	})
	s, log, _ := start(t, []Tag{number("a")}, Options{URL: url})
	eventually(t, "a warning", func() bool { return log.count("another client uses this id") > 0 })
	if got := s.Stats().Losses; got < suspicious {
		t.Errorf("warned after %d losses, want %d", got, suspicious)
	}
}
