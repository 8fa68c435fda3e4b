package ingest

import (
	"bufio"
	"bytes"
	"io"
	"strings"
	"sync/atomic"
	"testing"

	"github.com/eclipse/paho.mqtt.golang/packets"
)

// The answers that break a client which trusts them: too many results (the library
// panics, and with it the agent), too few, to nobody, and of the wrong kind. The next
// connection is answered well.
func TestWrongAnswersToSubscriptions(t *testing.T) {
	type request = *packets.SubscribePacket
	with := func(id uint16, codes ...byte) packets.ControlPacket {
		p := packets.NewControlPacket(packets.Suback).(*packets.SubackPacket)
		p.MessageID, p.ReturnCodes = id, codes
		return p
	}
	for name, tt := range map[string]struct {
		answer func(request) packets.ControlPacket
		want   string
	}{
		"many":      {func(p request) packets.ControlPacket { return with(p.MessageID, make([]byte, 300)...) }, "300 results for 2 topics"},
		"too many":  {func(p request) packets.ControlPacket { return with(p.MessageID, 1, 1, 1) }, "3 results for 2 topics"},
		"too few":   {func(p request) packets.ControlPacket { return with(p.MessageID, 1) }, "1 results for 2 topics"},
		"none":      {func(p request) packets.ControlPacket { return with(p.MessageID) }, "0 results for 2 topics"},
		"not asked": {func(p request) packets.ControlPacket { return with(p.MessageID+1, 1, 1) }, "which was not asked"},
		"of publishing": {func(p request) packets.ControlPacket {
			a := packets.NewControlPacket(packets.Puback).(*packets.PubackPacket)
			a.MessageID = p.MessageID
			return a
		}, "answered by another packet"},
	} {
		t.Run(name, func(t *testing.T) {
			var asked atomic.Int32
			url := stub(t, func(p packets.ControlPacket) packets.ControlPacket {
				switch p := p.(type) {
				case *packets.ConnectPacket:
					return connack(packets.Accepted)
				case *packets.SubscribePacket:
					if asked.Add(1) == 1 {
						return tt.answer(p)
					}
					return suback(p, 1)
				}
				return nil
			})
			s, log, _ := start(t, []Tag{number("a"), number("b")}, Options{URL: url})
			ready(t, s)
			eventually(t, "a line in the log", func() bool { return log.count(tt.want) > 0 })
			if st := s.Stats(); st.Connections < 2 {
				t.Errorf("%+v; want a second connection", st)
			}
		})
	}
}

// A code that MQTT reserves grants nothing.
func TestReservedCodesDeny(t *testing.T) {
	url := stub(t, func(p packets.ControlPacket) packets.ControlPacket {
		switch p := p.(type) {
		case *packets.ConnectPacket:
			return connack(packets.Accepted)
		case *packets.SubscribePacket:
			return suback(p, 0x7f)
		}
		return nil
	})
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: url})
	eventually(t, "a denied topic", func() bool { return len(s.Stats().Denied) == 1 })
	if got := s.Stats().Subscribed; got != 0 {
		t.Errorf("%d granted, want none", got)
	}
}

// Requests as the library writes them, with lengths of one byte and of two.
func TestRequestsAreCounted(t *testing.T) {
	for _, n := range []int{1, 3, filtersPerSubscribe} {
		p := packets.NewControlPacket(packets.Subscribe).(*packets.SubscribePacket)
		p.MessageID = 0xabcd
		for range n {
			p.Topics, p.Qoss = append(p.Topics, strings.Repeat("t", 40)), append(p.Qoss, 1)
		}
		var r requests
		r.note(encoded(t, p))
		if got := r.topics[0xabcd]; got != n || len(r.topics) != 1 {
			t.Errorf("noted %v, want %d topics", r.topics, n)
		}
	}
}

// FuzzAnswers claims: no packet that is passed on to the library makes it panic, whatever
// comes after a subscription to two topics, for an answer has two results.
func FuzzAnswers(f *testing.F) {
	f.Add([]byte("\x90\x04\x00\x07\x01\x01"))
	f.Add([]byte("\x90\x05\x00\x07\x01\x01\x01"))
	f.Add([]byte("\xd0\x00\x40\x02\x00\x07\x50\x02\x00\x07\xb0\x02\x00\x07"))
	f.Fuzz(func(t *testing.T, stream []byte) {
		flow := &inflow{r: bufio.NewReader(io.MultiReader(strings.NewReader(welcome), bytes.NewReader(stream))), deliver: func(*delivery) {}}
		flow.asked.note([]byte("\x82\x0a\x00\x07\x00\x01a\x01\x00\x01b\x01"))
		answers := 0
		for {
			p, err := packets.ReadPacket(flow)
			if err != nil {
				return
			}
			if p, ok := p.(*packets.SubackPacket); ok {
				if answers++; p.MessageID != 7 || len(p.ReturnCodes) != 2 || answers > 1 {
					t.Fatalf("passed on %v as answer %d", p, answers)
				}
			}
		}
	})
}
