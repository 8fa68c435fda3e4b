package agent

import (
	"testing"
	"time"
)

// While the broker sends, nothing is acknowledged that is not on disk, however long the
// disk takes nothing.
func TestNothingIsAcknowledgedWhileTheBrokerSends(t *testing.T) {
	var h hold
	for s := range int64(24 * 3600) {
		if h.over(wall(s*sec), false, 1000, 1000) {
			t.Fatalf("gives in after %d s", s)
		}
	}
}

// Once it has stopped, its queue decides: of a thousand messages that it is thought to
// keep, room for four hundred is left when the agent goes on in memory.
func TestHoldLastsAsLongAsTheBrokersQueue(t *testing.T) {
	for _, tt := range []struct {
		perSecond float64
		want      int64 // s
	}{
		{4000, 0}, {400, 1}, {100, 5}, {10, 59}, {4, 149}, {1, 239}, {0, 239},
	} {
		var h hold
		got := int64(0) // s after it was seen
		for got < 1000 && !h.over(wall((1000+got)*sec), true, tt.perSecond, 1000) {
			got++
		}
		if got != tt.want {
			t.Errorf("%g a second: goes on after %d s, want %d", tt.perSecond, got, tt.want)
		}
	}
}

// A broker that sends again has not stopped; the time before does not count.
func TestHoldBeginsAgain(t *testing.T) {
	var h hold
	for s := range int64(1000) {
		if h.over(wall(s*sec), s%100 != 0, 4, 1000) {
			t.Fatalf("gives in after %d s, 100 s at the most without a message", s)
		}
	}
}

// In memory it stays until the disk takes something.
func TestInMemoryStays(t *testing.T) {
	h := hold{inMemory: true}
	if !h.over(wall(sec), false, 0, 1000) {
		t.Error("waits again though what came before is acknowledged already")
	}
}

func TestRateFollows(t *testing.T) {
	var r rate
	at := int64(1)
	run := func(perSecond int, seconds int64) {
		for until := at + seconds; at < until; at++ {
			r.note(perSecond, wall(at*sec))
		}
	}
	r.note(0, wall(0))
	run(100, 30)
	if r.perSecond < 99 || r.perSecond > 101 {
		t.Errorf("%g a second, want 100", r.perSecond)
	}
	if run(400, 5); r.perSecond < 399 || r.perSecond > 401 {
		t.Errorf("%g a second, want 400 at once", r.perSecond)
	}
	if run(100, 10); r.perSecond < 300 {
		t.Errorf("%g a second ten seconds later, want most of the 400 still", r.perSecond)
	}
	if run(100, int64(5*rateSpan/time.Second)); r.perSecond > 105 {
		t.Errorf("%g a second in the end, want 100", r.perSecond)
	}
}
