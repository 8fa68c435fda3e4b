package ingest

import (
	"context"
	"encoding/binary"
	"sync"
)

// Message is one to publish.
type Message struct {
	Topic   string
	Payload []byte // not to be changed afterwards
	QoS     byte   // 0 or 1
	Retain  bool
}

// packet is the message as it is sent (MQTT 3.1.1, section 3.3), with its identifier
// where the quality of service is 1.
func (m *Message) packet(id uint16, again bool) []byte {
	first := byte(publish<<4) | m.QoS<<1
	if m.Retain {
		first |= 1
	}
	if again {
		first |= 8
	}
	length := 2 + len(m.Topic) + int(m.QoS)*2 + len(m.Payload)
	p := appendLength(append(make([]byte, 0, 5+length), first), length)
	p = append(binary.BigEndian.AppendUint16(p, uint16(len(m.Topic))), m.Topic...)
	if m.QoS > 0 {
		p = binary.BigEndian.AppendUint16(p, id)
	}
	return append(p, m.Payload...)
}

// mostInFlight bounds the messages that the broker has not yet confirmed; fewer than
// the least that a broker allows (common practice, no source: 20).
const mostInFlight = 16

// firstID is the least identifier of our messages. The library counts from 1 for its
// subscriptions, and never comes so far while one of ours is in flight.
const firstID = 1<<16 - mostInFlight

// publisher is the connection that messages are sent on.
type publisher interface{ publish(packet []byte) error }

// outbox holds messages until they are sent, within a bound. Of retained ones only the
// newest of a topic waits, and it waits for a connection too. Any other is for the
// connection that stands, and is dropped with it, unless it was sent already. What the
// broker has not confirmed is sent again on the next connection, before all else and
// under its old identifier: MQTT 3.1.1, section 4.4.
//
// The client library could publish too, but it panics over a message that a connection
// ended in the middle of.
type outbox struct {
	limit int
	up    func() bool // the library says that a connection stands; nil: always

	mu       sync.Mutex
	queue    []*Message
	retained map[string]*Message // of those that wait, by topic
	opened   publisher           // the newest connection
	greeted  bool                // its subscriptions are made: it may be sent on
	closed   bool                // nothing more is taken
	inFlight [mostInFlight]*Message
	again    [mostInFlight]bool // to be sent again
	counts   OutboxStats
	changed  chan struct{} // one slot: there may be something to send
	settled  chan struct{} // one slot: something was
}

// OutboxStats counts what was to be published.
type OutboxStats struct {
	Published uint64 // handed over: QoS 0 to the connection, QoS 1 to the broker
	Dropped   uint64 // without a connection, or without room
	Waiting   int    // now, those in flight included
}

func newOutbox(limit int) *outbox {
	return &outbox{limit: limit, retained: make(map[string]*Message), changed: make(chan struct{}, 1), settled: make(chan struct{}, 1)}
}

// put reports whether the message was taken.
func (b *outbox) put(m Message) bool {
	b.mu.Lock()
	defer b.mu.Unlock()
	if waits := b.retained[m.Topic]; waits != nil && m.Retain && !b.closed {
		*waits = m
		return true
	}
	if b.closed || len(b.queue) >= b.limit || !m.Retain && !b.stands() {
		b.counts.Dropped++
		return false
	}
	b.add(m)
	return true
}

// add appends without a bound. mu is held.
func (b *outbox) add(m Message) {
	if m.Retain {
		b.retained[m.Topic] = &m
	}
	b.queue = append(b.queue, &m)
	tell(b.changed)
}

// first puts m, which is retained, before all that waits, in place of what waits on its
// topic.
func (b *outbox) first(m Message) {
	b.mu.Lock()
	defer b.mu.Unlock()
	if b.closed {
		return
	}
	if waits := b.retained[m.Topic]; waits != nil {
		*waits = m
		return
	}
	b.retained[m.Topic] = &m
	b.queue = append([]*Message{&m}, b.queue...)
	tell(b.changed)
}

// open begins a new connection, which is not yet to be sent on; nil: the one before has
// ended.
func (b *outbox) open(c publisher) {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.opened, b.greeted = c, false
	kept := b.queue[:0]
	for _, m := range b.queue {
		if m.Retain {
			kept = append(kept, m)
		}
	}
	b.counts.Dropped += uint64(len(b.queue) - len(kept))
	clear(b.queue[len(kept):])
	b.queue = kept
	tell(b.settled)
}

// greet opens the way on a connection, if it is still the newest.
func (b *outbox) greet(c publisher) {
	b.mu.Lock()
	defer b.mu.Unlock()
	if c != b.opened {
		return
	}
	b.greeted = true
	for i, m := range b.inFlight {
		b.again[i] = m != nil
	}
	tell(b.changed)
}

// next waits for a packet that may be sent, and says on which connection.
func (b *outbox) next(ctx context.Context) (packet []byte, on publisher) {
	for {
		if packet, on = b.pop(); packet != nil {
			return packet, on
		}
		select {
		case <-b.changed:
		case <-ctx.Done():
			return nil, nil
		}
	}
}

func (b *outbox) pop() (packet []byte, on publisher) {
	b.mu.Lock()
	defer b.mu.Unlock()
	if !b.stands() {
		return nil, nil
	}
	free := -1
	for i, m := range b.inFlight {
		switch {
		case m == nil:
			free = i
		case b.again[i]:
			b.again[i] = false
			return m.packet(firstID+uint16(i), true), b.opened
		}
	}
	if len(b.queue) == 0 || free < 0 {
		return nil, nil
	}
	m := b.queue[0]
	b.queue[0] = nil
	b.queue = b.queue[1:]
	if b.retained[m.Topic] == m {
		delete(b.retained, m.Topic)
	}
	if m.QoS > 0 {
		b.inFlight[free] = m
	} else {
		b.counts.Published++
		tell(b.settled)
	}
	return m.packet(firstID+uint16(free), false), b.opened
}

// confirm notes that the broker has a message.
func (b *outbox) confirm(id uint16) {
	b.mu.Lock()
	defer b.mu.Unlock()
	if id < firstID || b.inFlight[id-firstID] == nil {
		return
	}
	b.inFlight[id-firstID] = nil
	b.counts.Published++
	tell(b.changed)
	tell(b.settled)
}

// close takes nothing more but the last message, nil for none, and waits until all is
// sent, or ctx ends, or there is no connection to send on.
func (b *outbox) close(ctx context.Context, last *Message) {
	b.mu.Lock()
	if last != nil {
		if waits := b.retained[last.Topic]; waits != nil {
			*waits = *last
		} else {
			b.add(*last)
		}
	}
	b.closed = true
	b.mu.Unlock()
	for b.pending() {
		select {
		case <-b.settled:
		case <-ctx.Done():
			return
		}
	}
}

func (b *outbox) pending() bool {
	b.mu.Lock()
	defer b.mu.Unlock()
	return b.waiting() > 0 && b.stands()
}

// stands takes in that a loss may be known here later than in the library. mu is held.
func (b *outbox) stands() bool { return b.greeted && (b.up == nil || b.up()) }

// waiting is how many messages do. mu is held.
func (b *outbox) waiting() int {
	n := len(b.queue)
	for _, m := range b.inFlight {
		if m != nil {
			n++
		}
	}
	return n
}

func (b *outbox) stats() OutboxStats {
	b.mu.Lock()
	defer b.mu.Unlock()
	counts := b.counts
	counts.Waiting = b.waiting()
	return counts
}

// tell puts a token into a channel of one slot.
func tell(c chan struct{}) {
	select {
	case c <- struct{}{}:
	default:
	}
}
