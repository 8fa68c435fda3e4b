package agent

import "time"

const (
	// brokerQueue is how many messages a broker that has stopped sending is trusted to
	// keep; mosquitto, unless told otherwise, keeps 1,000 and drops the rest.
	brokerQueue = 800
	// longestHold is how long readings are left with a broker that has stopped sending,
	// however seldom they come: event time stands still meanwhile, up to longestWait.
	longestHold = 4 * time.Minute
)

// hold says how long readings stay unacknowledged while the disk takes nothing.
//
// At first nothing changes but that commits fail: readings come in, are computed with,
// and stay with the broker as well, up to its limit of messages in flight. Then it stops
// sending and keeps what comes in its queue; figures grow blind. As long as that queue
// is thought to have room, waiting loses nothing whatever happens. Before it is full,
// the agent goes on in memory: it acknowledges what is not on disk.
type hold struct {
	since    time.Time // when the broker was first seen to have stopped; zero: it has not
	inMemory bool      // messages were acknowledged that are not on disk
}

// over reports whether to go on in memory. Stuck says whether the broker has stopped
// sending, perSecond how many messages came before it did.
func (h *hold) over(now time.Time, stuck bool, perSecond float64) bool {
	switch {
	case h.inMemory:
		return true
	case !stuck:
		h.since = time.Time{}
		return false
	case h.since.IsZero():
		h.since = now
	}
	held := now.Sub(h.since)
	return held >= longestHold || held.Seconds()*perSecond >= brokerQueue
}

// rateSpan is how far back a rate remembers, roughly.
const rateSpan = time.Minute

// rate is how many readings come in a second that the broker wants acknowledged.
type rate struct {
	perSecond float64
	count     int
	since     time.Time
}

// note takes in n more readings, up to now.
func (r *rate) note(n int, now time.Time) {
	if r.count += n; r.since.IsZero() {
		r.since = now
	}
	span := now.Sub(r.since)
	if span < time.Second {
		return
	}
	weight := min(1, span.Seconds()/rateSpan.Seconds())
	if r.perSecond == 0 {
		weight = 1
	}
	r.perSecond += weight * (float64(r.count)/span.Seconds() - r.perSecond)
	r.count, r.since = 0, now
}
