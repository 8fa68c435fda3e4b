package ingest

import (
	"context"
	"sync"
	"time"
)

// Received is a reading on its way to the disk, with what is needed to
// acknowledge its message.
type Received struct {
	Reading
	from *message // nil: delivered at most once, there is nothing to acknowledge
}

// Acknowledgeable reports whether the broker keeps the reading's message until
// [Session.Ack].
func (r Received) Acknowledgeable() bool { return r.from != nil }

// acknowledger is the connection that messages came on.
type acknowledger interface{ acknowledge(packets []byte) }

// message is one that the broker keeps until it is acknowledged.
type message struct {
	by     acknowledger
	answer answer
	open   int // readings not yet stored
}

// together is how many acknowledgements are sent at a time: by one write.
const together = 1000

// inbox holds readings until they are taken, and messages until they are
// acknowledged: in the order of their arrival (MQTT 3.1.1, section 4.6), so a
// refused message, which needs no storing, waits for the ones before it.
type inbox struct {
	limit    int
	patience time.Duration // how long a message may wait for room

	mu       sync.Mutex
	readings []Received
	unacked  []*message          // of this connection, by arrival
	byID     map[uint16]*message // the same; so there are never more than MQTT has identifiers
	crowded  bool                // waiting was in vain; the next take clears it
	left     bool                // a message stayed with the broker; a new connection clears it
	room     chan struct{}       // one slot: readings were taken
	mark     int                 // unacknowledged messages at which reached is told; 0: never
	reached  chan struct{}       // one slot: so many wait

	sending sync.Mutex // one at a time acknowledges, for the order
	answers []byte     // being sent
}

func newInbox(limit int, patience time.Duration) *inbox {
	return &inbox{limit: limit, patience: patience, byID: make(map[uint16]*message), room: make(chan struct{}, 1), reached: make(chan struct{}, 1)}
}

// reconnect begins a new connection. What was not acknowledged is delivered
// again on it; acknowledging the copies from before would do nothing.
func (b *inbox) reconnect() {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.unacked = nil
	b.byID = make(map[uint16]*message)
	b.left = false
}

// put adds a message's readings, waiting a little for room. When it reports
// false, the message must not be acknowledged; those that follow on the same
// connection then stay with the broker too, so that order is kept. m is nil for
// a message that cannot be acknowledged; if there is no room, it is lost.
func (b *inbox) put(ctx context.Context, m *message, readings []Outcome) bool {
	if ok, wait := b.offer(m, readings); ok || !wait {
		return ok
	}
	timer := time.NewTimer(b.patience)
	defer timer.Stop()
	for {
		select {
		case <-b.room:
			if ok, wait := b.offer(m, readings); ok || !wait {
				return ok
			}
		case <-ctx.Done():
			return b.leave(m)
		case <-timer.C:
			return b.leave(m)
		}
	}
}

// offer adds the readings if there is room; else wait tells whether to try
// again.
func (b *inbox) offer(m *message, outcomes []Outcome) (ok, wait bool) {
	b.mu.Lock()
	defer b.mu.Unlock()
	n := accepted(outcomes)
	if (b.left && m != nil) || len(b.readings)+n > b.limit {
		b.left = b.left || (b.crowded && m != nil)
		return false, !b.left && !b.crowded
	}
	if m != nil {
		m = b.await(m, n)
	}
	for i := range outcomes {
		if outcomes[i].kept() {
			b.readings = append(b.readings, Received{Reading: outcomes[i].Reading, from: m})
		}
	}
	return true, false
}

// await keeps m until n readings are stored. If the broker sends again what it has no
// acknowledgement for yet, the first copy stands for both and is acknowledged once: a
// second acknowledgement might meet the next message with that identifier, which is not
// stored. mu is held.
func (b *inbox) await(m *message, n int) *message {
	if before := b.byID[m.answer.id()]; before != nil {
		before.open += n
		return before
	}
	m.open = n
	b.byID[m.answer.id()] = m
	b.unacked = append(b.unacked, m)
	b.tell()
	return m
}

// tell passes on that as many messages wait as were asked for. mu is held.
func (b *inbox) tell() {
	if b.mark > 0 && len(b.unacked) >= b.mark {
		select {
		case b.reached <- struct{}{}:
		default:
		}
	}
}

// tellAt asks to be told when n messages wait.
func (b *inbox) tellAt(n int) {
	b.mu.Lock()
	defer b.mu.Unlock()
	if b.mark == n {
		return
	}
	b.mark = n
	b.tell()
}

func accepted(outcomes []Outcome) int {
	n := 0
	for i := range outcomes {
		if outcomes[i].kept() {
			n++
		}
	}
	return n
}

func (b *inbox) leave(m *message) bool {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.crowded = true
	b.left = b.left || m != nil
	return false
}

// take appends the readings to buf. left says that the broker holds messages
// that it will deliver only on a new connection.
func (b *inbox) take(buf []Received) (_ []Received, left bool) {
	b.mu.Lock()
	defer b.mu.Unlock()
	buf = append(buf, b.readings...)
	if cap(b.readings) > 4*max(len(b.readings), together) {
		b.readings = nil // a burst of long ago
	}
	clear(b.readings)
	b.readings = b.readings[:0]
	b.crowded = false
	select {
	case b.room <- struct{}{}:
	default:
	}
	return buf, b.left
}

// stored notes that readings are on disk.
func (b *inbox) stored(batch []Received) {
	b.mu.Lock()
	for _, r := range batch {
		if r.from != nil && r.from.open > 0 {
			r.from.open--
		}
	}
	b.mu.Unlock()
	b.acknowledge()
}

// acknowledge sends what is due, from the oldest message on. Nothing is written
// under mu.
func (b *inbox) acknowledge() {
	b.sending.Lock()
	defer b.sending.Unlock()
	for by := b.due(); by != nil; by = b.due() {
		by.acknowledge(b.answers)
	}
}

// due moves what is due next to answers, and returns who sends it; nil: nothing is.
func (b *inbox) due() acknowledger {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.answers = b.answers[:0]
	n := 0
	for n < min(len(b.unacked), together) && b.unacked[n].open == 0 && b.unacked[n].by == b.unacked[0].by {
		b.answers = append(b.answers, b.unacked[n].answer[:]...)
		delete(b.byID, b.unacked[n].answer.id())
		n++
	}
	if n == 0 {
		return nil
	}
	by := b.unacked[0].by
	clear(b.unacked[:n])
	b.unacked = b.unacked[n:]
	return by
}

func (b *inbox) waiting() int {
	b.mu.Lock()
	defer b.mu.Unlock()
	return len(b.unacked)
}
