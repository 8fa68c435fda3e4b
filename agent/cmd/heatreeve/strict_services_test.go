//go:build services

package main

import (
	"fmt"
	"net"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/eclipse/paho.mqtt.golang/packets"
)

// large is a plant of so many loads with four tags each.
func large(loads, port int, timing string) string {
	var tags, streams strings.Builder
	for i := range loads {
		fmt.Fprintf(&tags, "  FT-%d: {topic: plant/%d/ft, unit: m3/h, value: /v, time: /ts, accuracy: 0.5 %% of reading}\n", i, i)
		fmt.Fprintf(&tags, "  TT-%d-1: {topic: plant/%d/ti, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A}\n", i, i)
		fmt.Fprintf(&tags, "  TT-%d-2: {topic: plant/%d/to, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A}\n", i, i)
		fmt.Fprintf(&tags, "  PT-%d: {topic: plant/%d/p, unit: barg, value: /v, time: /ts, accuracy: 0.25 %% of 16 bar}\n", i, i)
		fmt.Fprintf(&streams, "  load-%d:\n    stream: {fluid: water, flow: FT-%d, inlet: TT-%d-1, outlet: TT-%d-2, pressure: PT-%d, meter_at: inlet, gives: heat}\n", i, i, i, i, i)
	}
	return fmt.Sprintf("site: Large Bench\ntimezone: UTC\nbarometer: 101.3 kPa\nbroker: {url: \"mqtt://127.0.0.1:%d\", client_id: large}\ntiming: {%s}\ntags:\n%sloads:\n%s", port, timing, tags.String(), streams.String())
}

// sweep is one reading of every tag of the large plant, by its topic.
func sweep(i int) (topic string, base float64) {
	kinds := [...]struct {
		name  string
		value float64
	}{{"ft", 12}, {"ti", 80}, {"to", 55}, {"p", 3}}
	k := kinds[i%4]
	return fmt.Sprintf("plant/%d/%s", i/4, k.name), k.value
}

// strict is a broker that lets exactly so many messages be in flight, and notes how
// long each of them waits for its acknowledgement.
type strict struct {
	listener net.Listener
	window   int
	begin    chan struct{} // closed once the client has subscribed to everything
	mu       sync.Mutex
	topics   int
	want     int
	kept     []due // published, not yet sent
	flying   map[uint16]time.Time
	waits    []time.Duration
	most     int // messages kept at most
	room     *sync.Cond
	conn     net.Conn
	out      sync.Mutex
}

type due struct {
	topic, payload string
	at             time.Time
}

func startStrict(t *testing.T, window, topics int) *strict {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	s := &strict{listener: l, window: window, want: topics, begin: make(chan struct{}), flying: make(map[uint16]time.Time)}
	s.room = sync.NewCond(&s.mu)
	go s.serve()
	go s.pump()
	t.Cleanup(func() {
		l.Close()
		s.mu.Lock()
		s.window = 0
		s.room.Broadcast()
		s.mu.Unlock()
	})
	return s
}

// serve answers one client; a second connection would mean that the first was lost.
func (s *strict) serve() {
	c, err := s.listener.Accept()
	if err != nil {
		return
	}
	defer c.Close()
	s.conn = c
	for {
		p, err := packets.ReadPacket(c)
		if err != nil {
			return
		}
		switch p := p.(type) {
		case *packets.ConnectPacket:
			s.write(packets.NewControlPacket(packets.Connack))
		case *packets.SubscribePacket:
			s.subscribe(p)
		case *packets.PingreqPacket:
			s.write(packets.NewControlPacket(packets.Pingresp))
		case *packets.PubackPacket:
			s.acknowledged(p.MessageID)
		}
	}
}

func (s *strict) write(p packets.ControlPacket) error {
	s.out.Lock()
	defer s.out.Unlock()
	return p.Write(s.conn)
}

func (s *strict) subscribe(p *packets.SubscribePacket) {
	ack := packets.NewControlPacket(packets.Suback).(*packets.SubackPacket)
	ack.MessageID = p.MessageID
	for range p.Topics {
		ack.ReturnCodes = append(ack.ReturnCodes, 1)
	}
	s.write(ack)
	if s.topics += len(p.Topics); s.topics == s.want {
		close(s.begin)
	}
}

func (s *strict) acknowledged(id uint16) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if at, ok := s.flying[id]; ok {
		s.waits = append(s.waits, time.Since(at))
		delete(s.flying, id)
		s.room.Broadcast()
	}
}

// publish hands the broker a message.
func (s *strict) publish(topic, payload string) {
	s.mu.Lock()
	defer s.mu.Unlock()
	s.kept = append(s.kept, due{topic, payload, time.Now()})
	s.most = max(s.most, len(s.kept))
	s.room.Broadcast()
}

// pump sends what is kept, as far as the window allows.
func (s *strict) pump() {
	id := uint16(0)
	for {
		s.mu.Lock()
		for s.window > 0 && (len(s.kept) == 0 || len(s.flying) >= s.window) {
			s.room.Wait()
		}
		if s.window == 0 {
			s.mu.Unlock()
			return
		}
		d := s.kept[0]
		s.kept = s.kept[1:]
		if id++; id == 0 {
			id++
		}
		s.flying[id] = d.at
		s.mu.Unlock()
		p := packets.NewControlPacket(packets.Publish).(*packets.PublishPacket)
		p.TopicName, p.Payload, p.Qos, p.MessageID = d.topic, []byte(d.payload), 1, id
		if s.write(p) != nil {
			return
		}
	}
}

// A broker that lets no more than twenty messages be in flight sends the next only
// when one is acknowledged, and that is when it is on disk: 4,000 readings a second of
// 4,000 tags go through all the same, with a commit interval of ten seconds, and no more
// wait than come in two seconds, on a machine that has much else to do.
func TestSmallWindowAtFullRate(t *testing.T) {
	const loads, rate, seconds = 1000, 4000, 15
	s := startStrict(t, 20, 4*loads)
	b := &broker{port: s.listener.Addr().(*net.TCPAddr).Port}
	a := startAgent(t, b.site(t, large(loads, b.port, "commit: 10 s")))
	select {
	case <-s.begin:
	case <-time.After(patience):
		t.Fatal("the agent does not subscribe")
	}
	begun := time.Now()
	tick := time.NewTicker(5 * time.Millisecond)
	defer tick.Stop()
	const ramp = 2 // s at a quarter of the rate, in which the agent finds the limit out
	sent, after := 0, 0
	for passed := time.Duration(0); passed < (ramp+seconds)*time.Second; passed = time.Since(begun) {
		<-tick.C
		due := int(passed.Seconds() * rate / 4)
		if passed > ramp*time.Second {
			due = ramp*rate/4 + int((passed-ramp*time.Second).Seconds()*rate)
		} else {
			after = due
		}
		for ; sent < due; sent++ {
			topic, v := sweep(sent % (4 * loads))
			s.publish(topic, fmt.Sprintf(`{"v":%.2f,"ts":%d}`, v+float64(sent%97)/100, time.Now().UnixMilli()))
		}
	}
	published := time.Now()
	eventually(t, "everything is acknowledged", func() error {
		s.mu.Lock()
		defer s.mu.Unlock()
		if n := len(s.waits); n < sent-s.window {
			return fmt.Errorf("%d of %d", n, sent)
		}
		return nil
	})
	behind := time.Since(published)
	commits := a.value(t, "heatreeve_history_commit_seconds_count")
	s.mu.Lock()
	defer s.mu.Unlock()
	steady := slices.Sorted(slices.Values(s.waits[min(after, len(s.waits)-1):]))
	if s.most > 2*rate || behind > 2*time.Second {
		t.Errorf("the broker kept up to %d messages, and was through %v after the last; want at most %d, and 2 s", s.most, behind, 2*rate)
	}
	t.Logf("%d readings/s for %d s through %d in flight: the broker kept at most %d, was through %v after the last; from publishing to acknowledgement %v in the middle, %v for 99 %%, %v at most; %.0f commits a second",
		rate, seconds, s.window, s.most, behind.Round(time.Millisecond), steady[len(steady)/2].Round(10*time.Microsecond), steady[len(steady)*99/100].Round(10*time.Microsecond), steady[len(steady)-1].Round(time.Millisecond), commits/(ramp+seconds))
}
