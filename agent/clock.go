package agent

import (
	"log/slog"
	"sync"
	"sync/atomic"
	"time"
)

const (
	// leastStep is by how much a clock must have been set to count; less is what
	// time services do all the time.
	leastStep = 500 * time.Millisecond
	// believeAfter is how long a clock that was set must stand before it is followed:
	// a wrong setting is mostly mended within that.
	believeAfter = 5 * time.Minute
	// settling is how long after its start the agent follows every setting at once: a
	// box that keeps no time while it is off has its clock set then.
	settling = 10 * time.Minute
)

// stepless is the system's clock, but for what it is set by: then it goes on as it was,
// by the time that passes, until the new setting has stood for a
// while. Arrivals are stamped by it, so a clock that is set forward opens no gap
// where there was none, and one that is set back does not make readings late, unless
// it stays so. A step is counted and logged. Soon after the start it is followed at
// once.
//
// Once the setting is followed, a forward step is time without readings, hence
// missing; after a backward step event time waits until the clock has come where it
// was, and readings without a stamp of their own are late meanwhile: that time has
// been accounted for, under a wrong name.
type stepless struct {
	wall    func() time.Time     // what the clock shows
	elapsed func() time.Duration // that has passed since some instant
	log     *slog.Logger

	mu      sync.Mutex
	base    time.Time     // what was shown when
	at      time.Duration // so much had passed
	born    time.Duration
	since   time.Duration // when the clock was seen to have been set
	by      time.Duration // by how much; 0: it was not
	steps   uint64
	shifted time.Duration // by settings that were followed
}

// newStepless returns a clock that follows wall; elapsed never runs back.
func newStepless(wall func() time.Time, elapsed func() time.Duration, log *slog.Logger) *stepless {
	return &stepless{wall: wall, elapsed: elapsed, log: log, base: wall(), at: elapsed(), born: elapsed()}
}

// systemClock is the clock of this machine.
func systemClock(log *slog.Logger) *stepless {
	return newStepless(func() time.Time { return time.Now().Round(0) }, elapsed(), log)
}

// elapsed returns a clock that nobody sets. It goes on while the machine sleeps, where that
// can be had: after waking, the right time must not be taken for a new setting.
func elapsed() func() time.Duration {
	start := time.Now()
	if _, ok := boottime(); !ok {
		return func() time.Duration { return time.Since(start) }
	}
	var last atomic.Int64
	return func() time.Duration {
		if d, ok := boottime(); ok {
			last.Store(int64(d))
		}
		return time.Duration(last.Load())
	}
}

// Now returns the present.
func (s *stepless) Now() time.Time {
	s.mu.Lock()
	defer s.mu.Unlock()
	wall, elapsed := s.wall(), s.elapsed()
	now := s.base.Add(elapsed - s.at)
	by := wall.Sub(now)
	switch {
	case by.Abs() < leastStep:
		s.base, s.at, s.by = wall, elapsed, 0
		return wall
	case (by - s.by).Abs() >= leastStep:
		s.since, s.by = elapsed, by
		s.steps++
		if elapsed-s.born < settling {
			return s.follow(wall, elapsed)
		}
		s.log.Warn("this machine's clock was set; readings are stamped as before until the setting has stood for a while", "by", by.Round(time.Millisecond), "while", believeAfter)
	case elapsed-s.since >= believeAfter:
		return s.follow(wall, elapsed)
	}
	return now
}

// follow takes over what the clock shows. mu is held.
func (s *stepless) follow(wall time.Time, elapsed time.Duration) time.Time {
	s.log.Warn("the new setting of this machine's clock is followed", "by", s.by.Round(time.Millisecond))
	s.shifted += s.by
	s.base, s.at, s.by = wall, elapsed, 0
	return wall
}

// state returns how often the clock was set, and by how much altogether it was followed.
func (s *stepless) state() (steps uint64, shifted time.Duration) {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.steps, s.shifted
}
