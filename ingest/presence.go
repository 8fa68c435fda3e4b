package ingest

import (
	"errors"
	"fmt"
	"time"
)

// Presence is a retained message by which others see whether the session stands.
// Online is published once the subscriptions are made. Offline is the will, which the
// broker publishes when the connection dies, and is published at a clean end too: a
// goodbye takes the will back (MQTT 3.1.1, section 3.14.4).
//
// Both are asked at each attempt to connect, with the same instant, and Offline at a
// clean end. All that Offline returns must be of one length.
type Presence struct {
	Topic           string
	Online, Offline func(at time.Time) []byte
}

// Words is a presence of two words that never change.
func Words(topic, online, offline string) *Presence {
	word := func(w string) func(time.Time) []byte { return func(time.Time) []byte { return []byte(w) } }
	return &Presence{Topic: topic, Online: word(online), Offline: word(offline)}
}

func (p *Presence) check() error {
	switch {
	case p == nil:
		return nil
	case p.Online == nil || p.Offline == nil:
		return errors.New("availability: what it says online and offline is missing")
	}
	if err := checkTopic(p.Topic); err != nil {
		return fmt.Errorf("availability: %w", err)
	}
	return nil
}

// present prepares the presence for the next attempt to connect. The client library
// takes the will once and for all, but it takes the slice, not a copy.
func (s *Session) present() {
	if s.o.Presence == nil {
		return
	}
	s.presented = s.o.Now()
	copy(s.will, s.o.Presence.Offline(s.presented))
}

func (s *Session) online() Message {
	return Message{Topic: s.o.Presence.Topic, Payload: s.o.Presence.Online(s.presented), QoS: 1, Retain: true}
}

func (s *Session) offline() Message {
	return Message{Topic: s.o.Presence.Topic, Payload: s.o.Presence.Offline(s.o.Now()), QoS: 1, Retain: true}
}
