package page

import "time"

// span is a length of time that the sheet of a load shows.
type span struct {
	Name, Words string
	back        func(time.Time) time.Time // from its end to its beginning
}

func hours(n int) func(time.Time) time.Time {
	return func(t time.Time) time.Time { return t.Add(-time.Duration(n) * time.Hour) }
}

func days(n int) func(time.Time) time.Time {
	return func(t time.Time) time.Time { return t.AddDate(0, 0, -n) }
}

// months goes back to the same day, or the last one of a month that is too short for it.
func months(n int) func(time.Time) time.Time {
	return func(t time.Time) time.Time {
		back := t.AddDate(0, -n, 0)
		if over := back.Day(); over < t.Day() {
			return back.AddDate(0, 0, -over)
		}
		return back
	}
}

// spans are those that may be chosen; the shortest comes first.
var spans = [...]span{
	{"1h", "1 hour", hours(1)},
	{"6h", "6 hours", hours(6)},
	{"1d", "1 day", days(1)},
	{"1w", "1 week", days(7)},
	{"1mo", "1 month", months(1)},
	{"6mo", "6 months", months(6)},
	{"1y", "1 year", months(12)},
	{"2y", "2 years", months(24)},
}

// usualSpan is the index of the span where an address has none.
const usualSpan = 1

// bys are the periods by which heat may be shown.
var bys = [...]string{"hour", "day", "month"}

// usualBy is the one where an address has none.
const usualBy = "hour"

// addressMinute writes an instant into an address, so that it means the same everywhere.
const addressMinute = "2006-01-02T15:04:05Z07:00"
