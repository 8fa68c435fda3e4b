package demo

import (
	"math"
	"time"
)

// Clock is the invented plant's clock: it starts at a chosen instant and runs a
// number of times faster than the system's. Steps of the system's wall clock do
// not move it. It is safe for use by many goroutines at once.
type Clock struct {
	start, base time.Time
	speed       float64
}

// NewClock returns a clock that shows start now and runs speed times as fast as
// the system's. Speed must be above zero.
func NewClock(start time.Time, speed float64) *Clock {
	return &Clock{start: start.Round(0), base: time.Now(), speed: speed}
}

// Now is the plant's time. It never goes back.
func (c *Clock) Now() time.Time { return c.start.Add(c.Elapsed()) }

// Start is the instant at which the clock began.
func (c *Clock) Start() time.Time { return c.start }

// Elapsed is how much plant time has passed since the start.
func (c *Clock) Elapsed() time.Duration {
	return time.Duration(float64(time.Since(c.base)) * c.speed)
}

// Speed is how many times faster than the system's the clock runs.
func (c *Clock) Speed() float64 { return c.speed }

// Until returns how long to wait by the system's clock until elapsed plant time
// has passed since the start; zero or less when it has.
func (c *Clock) Until(elapsed time.Duration) time.Duration {
	return time.Duration(math.Ceil(float64(elapsed)/c.speed)) - time.Since(c.base)
}
