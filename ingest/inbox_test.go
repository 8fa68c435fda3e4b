package ingest

import (
	"context"
	"slices"
	"testing"
	"testing/synctest"
	"time"
)

// acks notes acknowledgements in their order.
type acks struct{ sent []int }

func (a *acks) acknowledge(packets []byte) {
	for p := range slices.Chunk(packets, len(answer{})) {
		a.sent = append(a.sent, int(p[2])<<8|int(p[3]))
	}
}

// numbered is a message with an identifier.
func numbered(by *acks, id int) *message {
	return &message{by: by, answer: (&delivery{qos: 1, id: uint16(id)}).answer()}
}

// values are the outcomes of a message with n good readings and one refusal.
func values(n int) []Outcome {
	out := []Outcome{{Refusal: &Refusal{Reason: Empty}}}
	for i := range n {
		out = append(out, Outcome{Reading: Reading{Tag: i}})
	}
	return out
}

func put(t *testing.T, b *inbox, m *message, n int) {
	t.Helper()
	if !b.put(t.Context(), m, values(n)) {
		t.Fatalf("no room for message %v with %d readings", m, n)
	}
}

func TestAcknowledgedOnceInOrder(t *testing.T) {
	b, got := newInbox(100, time.Second), &acks{}
	put(t, b, numbered(got, 1), 2) // two readings
	put(t, b, numbered(got, 2), 0) // refused
	put(t, b, nil, 1)              // cannot be acknowledged
	put(t, b, numbered(got, 3), 1)
	b.acknowledge()
	batch, _ := b.take(nil)
	if len(batch) != 4 || b.waiting() != 3 || len(got.sent) != 0 {
		t.Fatalf("%d readings, %d waiting, sent %v; want 4, 3, none", len(batch), b.waiting(), got.sent)
	}
	b.stored(batch[3:])
	b.stored(batch[:1])
	if len(got.sent) != 0 {
		t.Fatalf("sent %v before the first message was stored whole", got.sent)
	}
	b.stored(batch[1:2])
	b.stored(batch)
	if !slices.Equal(got.sent, []int{1, 2, 3}) || b.waiting() != 0 {
		t.Errorf("sent %v, %d waiting; want 1, 2, 3 once each and none", got.sent, b.waiting())
	}
}

// A broker that sends again on the same connection: one acknowledgement for both copies,
// when all is stored, in the place of the first; then the identifier is free again.
func TestRepeatedIdentifierIsAcknowledgedOnce(t *testing.T) {
	b, got := newInbox(100, time.Second), &acks{}
	put(t, b, numbered(got, 1), 1)
	put(t, b, numbered(got, 2), 1)
	put(t, b, numbered(got, 1), 1)
	batch, _ := b.take(nil)
	b.stored(batch[:2])
	if len(got.sent) != 0 {
		t.Fatalf("sent %v while a copy of message 1 was not stored", got.sent)
	}
	b.stored(batch[2:])
	put(t, b, numbered(got, 1), 0) // another message
	b.acknowledge()
	if !slices.Equal(got.sent, []int{1, 2, 1}) || b.waiting() != 0 {
		t.Errorf("sent %v, %d waiting; want 1 once for both copies, 2, and 1 for the next message", got.sent, b.waiting())
	}
}

// Whatever a broker sends without waiting for acknowledgements, no more is kept than
// there are identifiers.
func TestUnacknowledgedAreBounded(t *testing.T) {
	b, got := newInbox(100, time.Second), &acks{}
	put(t, b, numbered(got, 0), 1) // not stored
	for i := range 3 << 16 {
		put(t, b, numbered(got, i), 0)
	}
	if b.waiting() != 1<<16 || len(b.byID) != 1<<16 || len(got.sent) != 0 {
		t.Errorf("%d and %d waiting, %d sent; want 65536 and none", b.waiting(), len(b.byID), len(got.sent))
	}
	batch, _ := b.take(nil)
	b.stored(batch)
	if b.waiting() != 0 || len(b.byID) != 0 || len(got.sent) != 1<<16 {
		t.Errorf("%d and %d waiting, %d sent; want none, 65536", b.waiting(), len(b.byID), len(got.sent))
	}
}

func TestReconnectionDropsAcknowledgements(t *testing.T) {
	b, got := newInbox(100, time.Second), &acks{}
	put(t, b, numbered(got, 1), 1)
	old, _ := b.take(nil)
	b.reconnect()
	put(t, b, numbered(got, 101), 1) // the same again
	b.stored(old)
	if len(got.sent) != 0 || b.waiting() != 1 {
		t.Errorf("sent %v, %d waiting after the old copy was stored; want none, 1", got.sent, b.waiting())
	}
	again, _ := b.take(nil)
	b.stored(again)
	if !slices.Equal(got.sent, []int{101}) {
		t.Errorf("sent %v; want the copy received last", got.sent)
	}
}

func TestFullInbox(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		b, got := newInbox(2, time.Second), &acks{}
		put(t, b, numbered(got, 1), 2)
		begin := time.Now()
		if b.put(t.Context(), numbered(got, 2), values(1)) || time.Since(begin) != time.Second {
			t.Fatalf("message 2 was let in, or gave up after %v; want refused after 1s", time.Since(begin))
		}
		if b.put(t.Context(), numbered(got, 3), values(1)) || time.Since(begin) != time.Second {
			t.Fatal("message 3 was let in or waited; want refused at once")
		}
		batch, left := b.take(nil)
		if !left || len(batch) != 2 {
			t.Fatalf("took %d, left %v; want 2 and messages left with the broker", len(batch), left)
		}
		if b.put(t.Context(), numbered(got, 4), values(1)) {
			t.Fatal("message 4 overtook those left with the broker")
		}
		put(t, b, nil, 1) // has no broker to come from again
		b.reconnect()
		put(t, b, numbered(got, 2), 1)
		if _, left := b.take(nil); left {
			t.Error("still left after the new connection")
		}
	})
}

func TestRoomIsWaitedFor(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		b, got := newInbox(2, time.Second), &acks{}
		put(t, b, numbered(got, 1), 2)
		done := make(chan bool)
		go func() { done <- b.put(t.Context(), numbered(got, 2), values(2)) }()
		synctest.Wait()
		b.take(nil)
		if !<-done {
			t.Error("refused although room was made")
		}
		ctx, cancel := context.WithCancel(t.Context())
		go func() { done <- b.put(ctx, numbered(got, 3), values(2)) }()
		synctest.Wait()
		cancel()
		if <-done {
			t.Error("let in although full and cancelled")
		}
		if batch, left := b.take(nil); len(batch) != 2 || !left {
			t.Errorf("took %d, left %v; want 2, true", len(batch), left)
		}
	})
}

// Whoever asks is told when so many messages wait, at once if they do already, and
// again only when another comes.
func TestReachedTells(t *testing.T) {
	told := func(b *inbox) bool {
		select {
		case <-b.reached:
			return true
		default:
			return false
		}
	}
	b, got := newInbox(100, time.Second), &acks{}
	put(t, b, numbered(got, 1), 1)
	put(t, b, numbered(got, 2), 1)
	if told(b) {
		t.Error("told without being asked")
	}
	if b.tellAt(2); !told(b) {
		t.Error("not told that two wait, as they did before")
	}
	if b.tellAt(2); told(b) {
		t.Error("told twice")
	}
	if put(t, b, numbered(got, 3), 1); !told(b) {
		t.Error("not told that there are more")
	}
	batch, _ := b.take(nil)
	b.stored(batch)
	if put(t, b, numbered(got, 4), 1); told(b) {
		t.Error("told though one waits")
	}
}

// Room for a burst is given back once it is not filled any more.
func TestRoomOfABurstIsGivenBack(t *testing.T) {
	b := newInbox(100_000, time.Second)
	for range 20 * together {
		put(t, b, nil, 1)
	}
	if batch, _ := b.take(nil); len(batch) != 20*together || cap(b.readings) < 20*together {
		t.Fatalf("took %d, room for %d; want %d and the room kept", len(batch), cap(b.readings), 20*together)
	}
	put(t, b, nil, 1)
	if batch, _ := b.take(nil); len(batch) != 1 || cap(b.readings) > 4*together {
		t.Errorf("took %d, room for %d left; want 1, and %d at most", len(batch), cap(b.readings), 4*together)
	}
}

// Sessions that share a channel all tell by it.
func TestSessionsShareWhatTellsThatMessagesWait(t *testing.T) {
	reached := make(chan struct{}, 1)
	for _, id := range []string{"one", "two"} {
		s, err := New([]Tag{number("a")}, Options{URL: "mqtt://127.0.0.1:1", ClientID: id, Reached: reached})
		if err != nil {
			t.Fatal(err)
		}
		s.TellAt(1)
		put(t, s.inbox, &message{}, 1)
		select {
		case <-reached:
		default:
			t.Errorf("session %s told nothing", id)
		}
	}
}
