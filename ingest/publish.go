package ingest

import (
	"context"
	"fmt"
	"time"
)

// farewell bounds the wait for what is still to be published at a clean end.
const farewell = time.Second

// Publish queues a message and returns at once. It reports false, and counts the
// message as dropped, where the queue of [Options].Outbox messages is full, and
// where m is not retained and there is no connection. A retained message takes the
// place of one that waits on the same topic.
//
// The error tells of a message that cannot be published at all.
func (s *Session) Publish(m Message) (queued bool, err error) {
	if err := checkTopic(m.Topic); err != nil {
		return false, fmt.Errorf("publish: %w", err)
	}
	if m.QoS > 1 {
		return false, fmt.Errorf("publish to %q: quality of service %d; use 0 or 1", m.Topic, m.QoS)
	}
	return s.outbox.put(m), nil
}

// send publishes what is queued until ctx ends.
func (s *Session) send(ctx context.Context) {
	for {
		packet, on := s.outbox.next(ctx)
		if packet == nil {
			return
		}
		if on.publish(packet) != nil {
			s.outbox.open(nil) // until there is another
		}
	}
}

// part says goodbye: what waits is published, and the presence ends.
func (s *Session) part() {
	ctx, cancel := context.WithTimeout(context.Background(), farewell)
	defer cancel()
	var last *Message
	if s.o.Presence != nil {
		m := s.offline()
		last = &m
	}
	s.outbox.close(ctx, last)
}
