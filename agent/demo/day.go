package demo

import (
	"math"
	"time"
)

// The invented day, as time since 05:30. It repeats every 24 hours; how fast an
// exchanger fouls and how loads swing is common practice, no source.
const (
	dayLength = 24 * time.Hour

	rampBegins    = 30 * time.Minute              // 06:00: production starts
	rampEnds      = time.Hour                     // 06:30
	eveningBegins = 16*time.Hour + 30*time.Minute // 22:00: production ends
	eveningEnds   = 17 * time.Hour
	cleanBegins   = 20 * time.Hour // 01:30: the exchanger of hot water and milk is cleaned
	cleanEnds     = 20*time.Hour + 30*time.Minute

	garbleBegins = time.Hour + 45*time.Minute // 07:15: a transmitter sends garbage
	garbleEnds   = garbleBegins + time.Minute
	silentBegins = 2*time.Hour + 30*time.Minute // 08:00: a transmitter falls silent
	silentEnds   = silentBegins + 6*time.Minute
	stopBegins   = 4*time.Hour + 30*time.Minute // 10:00: the chilled circuit's pump is off
	stopEnds     = stopBegins + 10*time.Minute

	// foulingHalf is when the film on the plates costs exactly the allowance of the
	// hot-water load: it is half of what it comes to in the end.
	foulingHalf = 7*time.Hour + 45*time.Minute // 13:15
	foulingPace = 70 * time.Minute
)

// within tells whether t lies in [from, to).
func within(t, from, to time.Duration) bool { return from <= t && t < to }

// rise goes evenly from 0 at from to 1 at to.
func rise(t, from, to time.Duration) float64 {
	return min(1, max(0, float64(t-from)/float64(to-from)))
}

// production is 0 at night and 1 by day.
func production(t time.Duration) float64 {
	return rise(t, rampBegins, rampEnds) - rise(t, eveningBegins, eveningEnds)
}

// fouling is the film on the plates, as a multiple of the one that costs the hot-water
// load its allowance: it begins slowly, grows, and levels off at twice that, until it is
// cleaned away.
func fouling(t time.Duration) float64 {
	film := 2 / (1 + math.Exp(-float64(t-foulingHalf)/float64(foulingPace)))
	return film * (1 - rise(t, cleanBegins, cleanEnds))
}

// swing is a sine of the given period, in −1 to 1; a period divides the day.
func swing(t, period time.Duration) float64 {
	return math.Sin(2 * math.Pi * float64(t%period) / float64(period))
}
