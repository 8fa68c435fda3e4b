package account

import (
	"math"
	"time"
)

const (
	minute = int64(time.Minute)
	hour   = int64(time.Hour)
	// reach is more than any zone's clock is off UTC.
	reach = 26 * hour
)

// By is the kind of period that an account is kept by.
type By uint8

const (
	Hour  By = iota + 1 // by the marks of the local clock
	Day                 // local; 23 to 25 hours where the clock changes
	Month               // local
)

// String is how the kind is written.
func (b By) String() string { return [...]string{"", "hour", "day", "month"}[b] }

// Kinds lists the kinds there are.
func Kinds() []By { return []By{Hour, Day, Month} }

// Bounds returns the period that holds the instant t by the clock of zone.
//
// An hour ends at the next full hour of the local clock, and wherever the clock
// changes its offset. A day begins when the clock first shows its date, and so does
// a month with its first day: where a clock set back repeats the end of the day
// before, the repetition belongs to the new day.
func (b By) Bounds(t int64, zone *time.Location) (start, end int64) {
	if b == Hour {
		return window(t, hour, zone)
	}
	date := time.Unix(0, t).In(zone)
	y, m, d := date.Date()
	if b == Month {
		d = 1
	}
	for {
		start = dayStart(y, m, d, zone)
		if b == Month {
			m++
		} else {
			d++
		}
		if end = dayStart(y, m, d, zone); t < end {
			return start, end
		}
	}
}

// window returns the stretch of the given length, counted from local midnight, that
// holds t; it ends where the clock changes its offset.
func window(t, length int64, zone *time.Location) (start, end int64) {
	s := stretchAt(t, zone)
	since := (t + s.offset) % length
	if since < 0 {
		since += length
	}
	return max(s.start, t-since), min(s.end, t-since+length)
}

// dayStart returns the first instant at which the clock of zone shows the date, or
// a later one where it passes the date over. Months and days may overflow.
func dayStart(y int, m time.Month, d int, zone *time.Location) int64 {
	local := time.Date(y, m, d, 0, 0, 0, 0, time.UTC).UnixNano()
	for t := local - reach; ; {
		s := stretchAt(t, zone)
		if at := max(t, local-s.offset); at < s.end {
			return at
		}
		t = s.end
	}
}

// stretch is a time through which a clock keeps one offset to UTC.
type stretch struct{ start, end, offset int64 }

func stretchAt(t int64, zone *time.Location) stretch {
	at := time.Unix(0, t).In(zone)
	_, offset := at.Zone()
	s := stretch{math.MinInt64, math.MaxInt64, int64(offset) * int64(time.Second)}
	from, to := at.ZoneBounds()
	for !from.IsZero() {
		before := from.Add(-1)
		if _, o := before.Zone(); o != offset {
			s.start = from.UnixNano()
			break
		}
		from, _ = before.ZoneBounds()
	}
	for !to.IsZero() {
		if _, o := to.Zone(); o != offset {
			s.end = to.UnixNano()
			break
		}
		_, to = to.ZoneBounds()
	}
	return s
}
