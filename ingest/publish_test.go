package ingest

import (
	"bytes"
	"fmt"
	"slices"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"github.com/eclipse/paho.mqtt.golang/packets"
	mochi "github.com/mochi-mqtt/server/v2"
	wire "github.com/mochi-mqtt/server/v2/packets"
)

// heard notes what a broker carries, as "topic payload" with an R behind what is kept.
type heard struct {
	mu   sync.Mutex
	said []string
}

func listen(t *testing.T, server *mochi.Server, filter string) *heard {
	t.Helper()
	h := &heard{}
	err := server.Subscribe(filter, 1, func(_ *mochi.Client, _ wire.Subscription, p wire.Packet) {
		h.mu.Lock()
		defer h.mu.Unlock()
		h.said = append(h.said, p.TopicName+" "+string(p.Payload))
	})
	if err != nil {
		t.Fatal(err)
	}
	return h
}

func (h *heard) all() []string {
	h.mu.Lock()
	defer h.mu.Unlock()
	return slices.Clone(h.said)
}

func (h *heard) eventually(t *testing.T, want ...string) {
	t.Helper()
	defer func() {
		if t.Failed() {
			t.Logf("heard %q; want %q", h.all(), want)
		}
	}()
	eventually(t, fmt.Sprintf("%q", want), func() bool { return slices.Equal(h.all(), want) })
}

// acknowledged waits until the broker has told that it has all that was published; what it has not
// is sent again on the next connection.
func acknowledged(t *testing.T, s *Session) {
	t.Helper()
	eventually(t, "the acknowledgements", func() bool { o := s.Stats().Outbox; return o.Published > 0 && o.Waiting == 0 })
}

// kept is what the broker keeps of a topic.
func kept(server *mochi.Server, topic string) string {
	for _, p := range server.Topics.Messages(topic) {
		return string(p.Payload)
	}
	return ""
}

const presence = "site/agent"

func TestPresenceOfACleanEnd(t *testing.T) {
	server, url := inProcess(t)
	h := listen(t, server, presence)
	s, _, stop := start(t, []Tag{number("a")}, Options{URL: url, Presence: Words(presence, "online", "offline")})
	ready(t, s)
	h.eventually(t, presence+" online")
	stop()
	h.eventually(t, presence+" online", presence+" offline") // once: the goodbye takes the will back
	if got := kept(server, presence); got != "offline" {
		t.Errorf("the broker keeps %q; want offline", got)
	}
}

func TestPresenceOfADeadConnection(t *testing.T) {
	server, url := inProcess(t)
	h := listen(t, server, presence)
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: url, Presence: Words(presence, "online", "offline")})
	ready(t, s)
	h.eventually(t, presence+" online")
	acknowledged(t, s)
	s.link.Load().end(errLeft) // without a goodbye
	h.eventually(t, presence+" online", presence+" offline", presence+" online")
}

// Online and the will of a connection are made for the same instant, anew for each one; a
// clean end has its own, as Sparkplug wants of a host.
func TestPresenceIsMadeForEachConnection(t *testing.T) {
	server, url := inProcess(t)
	h := listen(t, server, presence)
	var clock atomic.Int64
	stamped := func(word string) func(time.Time) []byte {
		return func(at time.Time) []byte { return fmt.Appendf(nil, "%s %04d", word, at.Unix()) }
	}
	s, _, stop := start(t, []Tag{number("a")}, Options{
		URL: url, Presence: &Presence{Topic: presence, Online: stamped("on"), Offline: stamped("off")},
		Now: func() time.Time { return time.Unix(clock.Load(), 0) },
	})
	ready(t, s)
	h.eventually(t, presence+" on 0000")
	acknowledged(t, s)
	clock.Store(7)
	s.link.Load().end(errLeft)
	h.eventually(t, presence+" on 0000", presence+" off 0000", presence+" on 0007")
	clock.Store(9)
	stop()
	h.eventually(t, presence+" on 0000", presence+" off 0000", presence+" on 0007", presence+" off 0009")
}

func TestPublish(t *testing.T) {
	server, url := inProcess(t)
	h := listen(t, server, "out/#")
	s, _, stop := start(t, []Tag{number("a")}, Options{URL: url})
	ready(t, s)
	var want []string
	for i := range 100 {
		m := Message{Topic: fmt.Sprintf("out/%02d", i), Payload: fmt.Append(nil, i), QoS: 1, Retain: i%2 == 0}
		eventually(t, "the way out", func() bool { ok, err := s.Publish(m); return ok && err == nil })
		want = append(want, m.Topic+" "+string(m.Payload))
	}
	stop() // what waits goes out before the end
	h.eventually(t, want...)
	if kept(server, "out/42") != "42" || kept(server, "out/43") != "" {
		t.Errorf("kept %q and %q; want the retained one only", kept(server, "out/42"), kept(server, "out/43"))
	}
	if got := s.Stats().Outbox; got.Published != 100 || got.Waiting != 0 {
		t.Errorf("outbox %+v; want 100 published", got)
	}
}

func TestWhatCannotBePublished(t *testing.T) {
	s, err := New([]Tag{number("a")}, Options{URL: "mqtt://127.0.0.1", ClientID: "x"})
	if err != nil {
		t.Fatal(err)
	}
	for _, m := range []Message{{Topic: "a/#"}, {Topic: ""}, {Topic: "a", QoS: 2}} {
		if queued, err := s.Publish(m); queued || err == nil {
			t.Errorf("%+v: %v, %v; want an error", m, queued, err)
		}
	}
	for _, p := range []*Presence{{Topic: "a"}, Words("a/+", "on", "off")} {
		if _, err := New([]Tag{number("a")}, Options{URL: "mqtt://127.0.0.1", ClientID: "x", Presence: p}); err == nil {
			t.Errorf("a presence on %q with Online %t was taken", p.Topic, p.Online != nil)
		}
	}
}

// A message that is not retained belongs to the connection; of retained ones the newest
// of each topic waits for it, and no more topics than there is room for.
func TestOutboxIsBounded(t *testing.T) {
	b := newOutbox(3)
	if b.put(Message{Topic: "command"}) {
		t.Error("a message without a connection to go on was taken")
	}
	for i := range 10 {
		b.put(Message{Topic: "a", Payload: []byte{byte(i)}, Retain: true})
	}
	for i, topic := range []string{"b", "c", "d"} {
		if got, want := b.put(Message{Topic: topic, Retain: true}), i < 2; got != want {
			t.Errorf("topic %s: taken %t, want %t", topic, got, want)
		}
	}
	if got := b.stats(); got.Dropped != 2 || got.Waiting != 3 {
		t.Errorf("%+v; want 2 dropped, 3 waiting", got)
	}
	if packet, _ := b.pop(); packet != nil {
		t.Error("sent without a connection")
	}
	l := new(link)
	b.open(l)
	b.greet(l)
	p, err := packets.ReadPacket(bytes.NewReader(first(b.pop())))
	if err != nil {
		t.Fatal(err)
	}
	if m := p.(*packets.PublishPacket); m.TopicName != "a" || m.Payload[0] != 9 || !m.Retain || m.Dup || m.Qos != 0 {
		t.Errorf("first out is %+v; want the newest of topic a", m)
	}
	b.put(Message{Topic: "command"})
	b.open(nil)
	if got := b.stats(); got.Dropped != 3 || got.Waiting != 2 || got.Published != 1 {
		t.Errorf("%+v; want the command dropped with the connection, b and c waiting, a published", got)
	}
}

func first(packet []byte, _ publisher) []byte { return packet }

// What was not confirmed goes out again on the next connection under its old identifier,
// marked as a repeat, before what is newer.
func TestUnconfirmedIsSentAgain(t *testing.T) {
	b := newOutbox(10)
	for n := range 2 {
		l := new(link)
		b.open(l)
		b.greet(l)
		b.greet(new(link)) // of a connection that is gone: without effect
		b.put(Message{Topic: fmt.Sprint("t", n), Payload: []byte("x"), QoS: 1, Retain: true})
		var got []string
		for packet, on := b.pop(); packet != nil; packet, on = b.pop() {
			p, err := packets.ReadPacket(bytes.NewReader(packet))
			if err != nil || on != publisher(l) {
				t.Fatal(err, on)
			}
			m := p.(*packets.PublishPacket)
			got = append(got, fmt.Sprint(m.TopicName, " ", m.MessageID-firstID, " ", m.Dup))
		}
		want := [][]string{{"t0 15 false"}, {"t0 15 true", "t1 14 false"}}[n]
		if !slices.Equal(got, want) {
			t.Errorf("connection %d: sent %q, want %q", n, got, want)
		}
	}
	for _, id := range []uint16{0, 7, firstID + 15, firstID + 15, firstID + 14, firstID + 3} {
		b.confirm(id)
	}
	if got := b.stats(); got.Published != 2 || got.Waiting != 0 {
		t.Errorf("%+v; want both published once", got)
	}
}

// While the broker confirms nothing, no more than a few messages are in flight.
func TestFewAreInFlight(t *testing.T) {
	var got atomic.Int32
	url := stub(t, func(p packets.ControlPacket) packets.ControlPacket {
		switch p := p.(type) {
		case *packets.ConnectPacket:
			return connack(packets.Accepted)
		case *packets.SubscribePacket:
			return suback(p, 1)
		case *packets.PublishPacket:
			got.Add(1)
		}
		return nil
	})
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: url, Outbox: 30})
	ready(t, s)
	for i := range 30 {
		if ok, err := s.Publish(Message{Topic: fmt.Sprint("out/", i), QoS: 1, Retain: true}); !ok || err != nil {
			t.Fatalf("message %d: %t, %v", i, ok, err)
		}
	}
	eventually(t, "those in flight", func() bool { return got.Load() == mostInFlight })
	if st := s.Stats().Outbox; st.Published != 0 || st.Waiting != 30 {
		t.Errorf("outbox %+v; want 30 waiting", st)
	}
}
