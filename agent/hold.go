package agent

import "time"

const (
	// trusted is the part of its queue that a broker which has stopped sending is trusted
	// to keep messages in; a burst must find room as well.
	trusted = 0.6
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
	since    time.Time // when the broker stopped; zero: it has not
	inMemory bool      // messages were acknowledged that are not on disk
}

// over reports whether to go on in memory. Stuck says whether the broker has stopped
// sending, perSecond how many messages came before it did, and queue how many it keeps.
func (h *hold) over(now time.Time, stuck bool, perSecond float64, queue int) bool {
	switch {
	case h.inMemory:
		return true
	case !stuck:
		h.since = time.Time{}
		return false
	case h.since.IsZero():
		h.since = now.Add(-stuckLooks * lookEvery) // when the last message came
	}
	held := now.Sub(h.since)
	return held >= longestHold || held.Seconds()*perSecond >= trusted*float64(queue)
}

const (
	// rateSpan is how far back a rate remembers a busier time, roughly.
	rateSpan = time.Minute
	// rateLeast is the least time that a rate is taken over: what a broker had kept back
	// comes in bursts.
	rateLeast = 5 * time.Second
)

// rate is how many messages a second are acknowledged: it rises at once, and falls
// slowly, so that a queue is rather thought to fill too soon than too late.
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
	if span < rateLeast {
		return
	}
	present, faded := float64(r.count)/span.Seconds(), max(0, 1-span.Seconds()/rateSpan.Seconds())
	r.perSecond = max(present, present+faded*(r.perSecond-present))
	r.count, r.since = 0, now
}
