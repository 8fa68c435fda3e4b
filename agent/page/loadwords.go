package page

import (
	"strconv"
	"time"

	"heatreeve/agent/shown"
	"heatreeve/thermo/unit"
)

// longClock writes an instant for people, with its offset: a clock that is set back shows an
// hour twice.
const longClock = "Mon 2 Jan 2006 15:04:05 -07:00"

// clock writes an instant to the minute.
func (s *loadSheet) clock(t time.Time) string {
	return t.In(s.zone).Format("Mon 2 Jan 2006 15:04 -07:00")
}

// lengths are the units of a length of time, largest first.
var lengths = [...]struct {
	of   time.Duration
	name string
}{{24 * time.Hour, "d"}, {time.Hour, "h"}, {time.Minute, "min"}, {time.Second, "s"}}

// duration writes a length of time in its largest unit and the next one.
func duration(d time.Duration) string {
	for i, u := range lengths[:len(lengths)-1] {
		if d < u.of {
			continue
		}
		text, next := strconv.Itoa(int(d/u.of))+" "+u.name, lengths[i+1]
		if n := d % u.of / next.of; n > 0 {
			text += " " + strconv.Itoa(int(n)) + " " + next.name
		}
		return text
	}
	return brief(d.Seconds(), 3) + " s"
}

// fourDigits writes a number with four digits.
func fourDigits(x float64) string {
	text, _ := shown.Figure(unit.Unit{Factor: 1}, x, 0)
	return text
}
