package ingest

import (
	"context"
	"sync"
)

// Message is one to publish.
type Message struct {
	Topic   string
	Payload []byte // not to be changed afterwards
	QoS     byte   // 0 or 1
	Retain  bool
}

// outbox holds messages until they are sent, within a bound. Of retained ones only the
// newest of a topic waits, and it waits for a connection too. Any other is for the
// connection that stands, and is dropped with it.
type outbox struct {
	limit int
	up    func() bool // the library says that the connection stands; nil: always

	mu       sync.Mutex
	queue    []*Message
	retained map[string]*Message // of those that wait, by topic
	open     bool                // a connection stands, and its subscriptions are made
	closed   bool                // nothing more is taken
	inFlight int                 // handed to the library and not settled yet
	counts   OutboxStats
	changed  chan struct{} // one slot: there may be something to send
	settled  chan struct{} // one slot: something was
}

// OutboxStats counts what was to be published.
type OutboxStats struct {
	Published uint64 // handed over: QoS 0 to the connection, QoS 1 to the broker
	Dropped   uint64 // without a connection, without room, or failed
	Waiting   int    // now, those in flight included
}

// mostInFlight bounds the messages that the broker has not yet confirmed; fewer than
// the least that a broker allows (common practice, no source: 20).
const mostInFlight = 16

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

// first puts m before all else; it takes the place of what waits on its topic.
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

// connection notes whether one stands.
func (b *outbox) connection(stands bool) {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.open = stands
	if stands {
		tell(b.changed)
		return
	}
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

// next waits for a message that may be sent; the caller settles it.
func (b *outbox) next(ctx context.Context) (m Message, ok bool) {
	for {
		if m, ok = b.pop(); ok {
			return m, true
		}
		select {
		case <-b.changed:
		case <-ctx.Done():
			return Message{}, false
		}
	}
}

func (b *outbox) pop() (Message, bool) {
	b.mu.Lock()
	defer b.mu.Unlock()
	if len(b.queue) == 0 || !b.stands() || b.inFlight >= mostInFlight {
		return Message{}, false
	}
	m := b.queue[0]
	b.queue[0] = nil
	b.queue = b.queue[1:]
	if b.retained[m.Topic] == m {
		delete(b.retained, m.Topic)
	}
	b.inFlight++
	return *m, true
}

// settle notes what became of a message.
func (b *outbox) settle(err error) {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.inFlight--
	if err == nil {
		b.counts.Published++
	} else {
		b.counts.Dropped++
	}
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
	return len(b.queue)+b.inFlight > 0 && b.stands()
}

// stands takes in that a loss may be known here later than in the library. mu is held.
func (b *outbox) stands() bool { return b.open && (b.up == nil || b.up()) }

func (b *outbox) stats() OutboxStats {
	b.mu.Lock()
	defer b.mu.Unlock()
	counts := b.counts
	counts.Waiting = len(b.queue) + b.inFlight
	return counts
}

// tell puts a token into a channel of one slot.
func tell(c chan struct{}) {
	select {
	case c <- struct{}{}:
	default:
	}
}
