package ingest

import (
	"maps"
	"math"
	"slices"
	"sync"
)

// Stats is a copy of a session's counts since its start.
type Stats struct {
	Connected    bool
	Connections  uint64   // how often it was connected
	Losses       uint64   // how often a connection was lost
	Failures     uint64   // attempts to connect that failed
	LastError    string   // of the last failure or loss; "" while all is well
	Subscribed   int      // topics granted on this connection
	Denied       []string // topics that the broker refused, sorted
	LastReceived int64    // arrival of the last message, Unix nanoseconds; 0: none yet
	UnknownTopic uint64   // messages on a topic that no tag reads from
	Outbox       OutboxStats
	Sparkplug    SparkplugStats
	Tags         []TagStats // as given to [New]
}

// TagStats are the counts of one tag.
type TagStats struct {
	Accepted uint64
	Refused  Counts
	NewestAt int64    // newest event time accepted, Unix nanoseconds; 0: none yet
	Last     *Refusal // the last refused message; nil: none yet
	// Retained is the SI value of the last message refused as [Retained]: it
	// may be shown as the last known value, but never be integrated. NaN: none.
	Retained float64
}

// tally is where Stats are counted.
type tally struct {
	mu    sync.Mutex
	stats Stats
}

func newTally(tags int) *tally {
	t := &tally{stats: Stats{Tags: make([]TagStats, tags)}}
	for i := range t.stats.Tags {
		t.stats.Tags[i].Retained = math.NaN()
	}
	return t
}

// update runs f on the counts, alone.
func (t *tally) update(f func(*Stats)) {
	t.mu.Lock()
	defer t.mu.Unlock()
	f(&t.stats)
}

func (t *tally) copy() Stats {
	t.mu.Lock()
	defer t.mu.Unlock()
	s := t.stats
	s.Tags = slices.Clone(s.Tags)
	s.Denied = slices.Clone(s.Denied)
	return s
}

// unknown counts a message without a tag and reports whether it is the first.
func (t *tally) unknown(arrival int64) (first bool) {
	t.mu.Lock()
	defer t.mu.Unlock()
	t.stats.LastReceived = arrival
	t.stats.UnknownTopic++
	return t.stats.UnknownTopic == 1
}

// count books what a message gave, and returns the refusals that are the first
// of their tag and reason.
func (t *tally) count(arrival int64, outcomes []Outcome) (first []*Refusal) {
	t.mu.Lock()
	defer t.mu.Unlock()
	t.stats.LastReceived = arrival
	for i := range outcomes {
		o := &outcomes[i]
		tag := &t.stats.Tags[o.Tag]
		if o.Refusal == nil {
			tag.Accepted++
			tag.NewestAt = max(tag.NewestAt, o.At)
			continue
		}
		tag.Refused[o.Refusal.Reason]++
		tag.Last = o.Refusal
		if o.Refusal.Reason == Retained {
			tag.Retained = o.Value
		}
		if tag.Refused[o.Refusal.Reason] == 1 {
			first = append(first, o.Refusal)
		}
	}
	return first
}

// subscribed notes the outcome of the subscriptions.
func (t *tally) subscribed(granted int, denied map[string]bool) {
	names := slices.Sorted(maps.Keys(denied))
	t.update(func(s *Stats) { s.Subscribed, s.Denied = granted, names })
}
