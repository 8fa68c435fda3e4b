package account

import (
	"fmt"
	"strings"
	"time"
)

const (
	firstYear = 1970
	lastYear  = 2199
)

// dateHelp is what may be written.
const dateHelp = "write 2026-12-31, 2026-12, 2026-12-31T06:00, or with its offset 2026-12-31T06:00+01:00"

// Instant reads an instant as people write it: a day or a month by the clock of
// zone, which stands for its beginning, a local time, or a time with its offset to
// UTC. It must be a whole minute. A local time that the clock of zone passes over, or
// shows twice, is an error.
func Instant(text string, zone *time.Location) (int64, error) {
	t, err := instant(text, zone)
	switch {
	case err != nil:
		return 0, err
	case t%minute != 0:
		return 0, fmt.Errorf("%q is not a whole minute", text)
	}
	return t, nil
}

// Moment is [Instant] for any time, which need not be a whole minute.
func Moment(text string, zone *time.Location) (int64, error) { return instant(text, zone) }

func instant(text string, zone *time.Location) (int64, error) {
	for _, layout := range [...]string{"2006-01-02", "2006-01"} {
		if d, err := time.Parse(layout, text); err == nil {
			y, m, day := d.Date()
			return dayStart(y, m, day, zone), checkYear(text, y)
		}
	}
	written := strings.Replace(text, " ", "T", 1)
	for _, layout := range [...]string{time.RFC3339, "2006-01-02T15:04Z07:00"} {
		if t, err := time.Parse(layout, written); err == nil {
			return t.UnixNano(), checkYear(text, t.Year())
		}
	}
	for _, layout := range [...]string{"2006-01-02T15:04", "2006-01-02T15:04:05"} {
		if t, err := time.Parse(layout, written); err == nil {
			if err := checkYear(text, t.Year()); err != nil {
				return 0, err
			}
			return local(text, t.UnixNano(), zone)
		}
	}
	return 0, fmt.Errorf("%q is no date; %s", text, dateHelp)
}

func checkYear(text string, y int) error {
	if y < firstYear || y > lastYear {
		return fmt.Errorf("%q: the year must be %d to %d", text, firstYear, lastYear)
	}
	return nil
}

// local returns the one instant at which the clock of zone shows what a clock on UTC
// shows at shown.
func local(text string, shown int64, zone *time.Location) (int64, error) {
	var found []int64
	for t := shown - reach; t < shown+reach; {
		s := stretchAt(t, zone)
		if at := shown - s.offset; at >= s.start && at < s.end {
			found = append(found, at)
		}
		t = s.end
	}
	switch len(found) {
	case 1:
		return found[0], nil
	case 0:
		return 0, fmt.Errorf("%q is passed over by the clock of %s, which goes forward then; write another time", text, zone)
	}
	var both []string
	for _, t := range found {
		both = append(both, time.Unix(0, t).In(zone).Format("2006-01-02T15:04-07:00"))
	}
	return 0, fmt.Errorf("%q comes twice by the clock of %s, which goes back then; write %s", text, zone, strings.Join(both, " or "))
}
