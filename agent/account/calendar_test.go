package account

import (
	"testing"
	"time"
	_ "time/tzdata"

	"pgregory.net/rapid"
)

// zones are places whose clocks differ in what can go wrong: an hour of summer time, an
// offset with half an hour, summer time of half an hour, none, quarters of an hour.
var zones = []string{"Europe/Dublin", "America/St_Johns", "Australia/Lord_Howe", "Asia/Kolkata", "Asia/Kathmandu", "Pacific/Chatham", "UTC"}

func place(t interface{ Fatal(...any) }, name string) *time.Location {
	zone, err := time.LoadLocation(name)
	if err != nil {
		t.Fatal(err)
	}
	return zone
}

func at(t interface{ Fatal(...any) }, text string) int64 {
	x, err := time.Parse("2006-01-02T15:04Z07:00", text)
	if err != nil {
		t.Fatal(err)
	}
	return x.UnixNano()
}

// Days and the hours and windows in them where clocks change. Source: IANA time zone
// database, as Go carries it. A day of 23 or 25 h has 92 or 100 quarters.
func TestDaysWhereTheClockChanges(t *testing.T) {
	for _, tt := range []struct {
		zone, start, end string
		hours, quarters  int
	}{
		{"Europe/Dublin", "2026-03-29T00:00Z", "2026-03-30T00:00+01:00", 23, 92},
		{"Europe/Dublin", "2026-10-25T00:00+01:00", "2026-10-26T00:00Z", 25, 100},
		{"Europe/Dublin", "2026-07-01T00:00+01:00", "2026-07-02T00:00+01:00", 24, 96},
		{"America/St_Johns", "2026-03-08T00:00-03:30", "2026-03-09T00:00-02:30", 23, 92},
		{"America/St_Johns", "2026-11-01T00:00-02:30", "2026-11-02T00:00-03:30", 25, 100},
		// The half hour that comes twice, or not at all, is an hour's period of its own.
		{"Australia/Lord_Howe", "2026-04-05T00:00+11:00", "2026-04-06T00:00+10:30", 25, 98},
		{"Australia/Lord_Howe", "2026-10-04T00:00+10:30", "2026-10-05T00:00+11:00", 24, 94},
		{"Asia/Kolkata", "2026-03-29T00:00+05:30", "2026-03-30T00:00+05:30", 24, 96},
		{"Asia/Kathmandu", "2026-03-29T00:00+05:45", "2026-03-30T00:00+05:45", 24, 96},
		// There the clock changes at midnight: 00:00 is not shown.
		{"Africa/Cairo", "2024-04-26T01:00+03:00", "2024-04-27T00:00+03:00", 23, 92},
		// There it was set back at 00:01, into the day before.
		{"America/St_Johns", "2010-11-07T00:00-02:30", "2010-11-08T00:00-03:30", 26, 101},
		// There a day was left out.
		{"Pacific/Apia", "2011-12-29T00:00-10:00", "2011-12-31T00:00+14:00", 24, 96},
	} {
		zone, from, to := place(t, tt.zone), at(t, tt.start), at(t, tt.end)
		for _, inside := range []int64{from, from + 3*hour, to - 1} {
			if start, end := Day.Bounds(inside, zone); start != from || end != to {
				t.Errorf("%s: the day that holds %s goes from %s to %s, want %s to %s", tt.zone, stamp(inside), stamp(start), stamp(end), stamp(from), stamp(to))
			}
		}
		count := func(length int64) (n int) {
			for at := from; at < to; n++ {
				_, at = window(at, length, zone)
			}
			return n
		}
		if hours, quarters := count(hour), count(hour/4); hours != tt.hours || quarters != tt.quarters {
			t.Errorf("%s: the day from %s has %d hours and %d quarters, want %d and %d", tt.zone, tt.start, hours, quarters, tt.hours, tt.quarters)
		}
	}
}

func TestMonthBounds(t *testing.T) {
	for _, tt := range []struct{ zone, inside, start, end string }{
		{"Europe/Dublin", "2026-10-31T23:59Z", "2026-10-01T00:00+01:00", "2026-11-01T00:00Z"},
		{"Europe/Dublin", "2026-12-15T12:00Z", "2026-12-01T00:00Z", "2027-01-01T00:00Z"},
		{"America/St_Johns", "2026-11-01T03:00Z", "2026-11-01T00:00-02:30", "2026-12-01T00:00-03:30"},
		{"Asia/Kolkata", "2028-02-29T18:29Z", "2028-02-01T00:00+05:30", "2028-03-01T00:00+05:30"},
		{"Asia/Kolkata", "2028-02-29T18:30Z", "2028-03-01T00:00+05:30", "2028-04-01T00:00+05:30"},
	} {
		start, end := Month.Bounds(at(t, tt.inside), place(t, tt.zone))
		if start != at(t, tt.start) || end != at(t, tt.end) {
			t.Errorf("%s, %s: %s to %s, want %s to %s", tt.zone, tt.inside, stamp(start), stamp(end), tt.start, tt.end)
		}
	}
}

// At any instant each period holds it, is the same from within, joins the next, and
// lies in one period of the greater kind.
func TestPeriodsNest(t *testing.T) {
	first, last := at(t, "2009-01-01T00:00Z"), at(t, "2035-01-01T00:00Z")
	rapid.Check(t, func(t *rapid.T) {
		zone := place(t, rapid.SampledFrom(append(zones, "Africa/Cairo", "Pacific/Apia", "America/Sao_Paulo", "America/Havana")).Draw(t, "zone"))
		x := rapid.Int64Range(first, last).Draw(t, "instant")
		var outer, outerEnd int64
		for _, by := range []By{Month, Day, Hour} {
			start, end := by.Bounds(x, zone)
			if x < start || x >= end {
				t.Fatalf("%v of %s: %s to %s", by, stamp(x), stamp(start), stamp(end))
			}
			for _, y := range []int64{start, end - 1, start + (end-start)/2} {
				if s, e := by.Bounds(y, zone); s != start || e != end {
					t.Fatalf("%v: %s lies in %s to %s, and in %s to %s", by, stamp(y), stamp(start), stamp(end), stamp(s), stamp(e))
				}
			}
			if by != Month && (start < outer || end > outerEnd) {
				t.Fatalf("%v from %s to %s is not in %s to %s", by, stamp(start), stamp(end), stamp(outer), stamp(outerEnd))
			}
			outer, outerEnd = start, end
		}
	})
}

func TestInstant(t *testing.T) {
	for _, tt := range []struct{ zone, text, want, err string }{
		{"Europe/Dublin", "2026-07-01", "2026-07-01T00:00+01:00", ""},
		{"Europe/Dublin", "2026-07", "2026-07-01T00:00+01:00", ""},
		{"Europe/Dublin", "2026-07-01T06:30", "2026-07-01T06:30+01:00", ""},
		{"Europe/Dublin", "2026-07-01 06:30", "2026-07-01T06:30+01:00", ""},
		{"Europe/Dublin", "2026-07-01T06:30:00", "2026-07-01T06:30+01:00", ""},
		{"Europe/Dublin", "2026-07-01T06:30Z", "2026-07-01T06:30Z", ""},
		{"Europe/Dublin", "2026-07-01T06:30:00+05:30", "2026-07-01T06:30+05:30", ""},
		{"Africa/Cairo", "2024-04-26", "2024-04-26T01:00+03:00", ""},
		{"Europe/Dublin", "2026-03-29T01:30", "", "is passed over by the clock of Europe/Dublin"},
		{"Europe/Dublin", "2026-10-25T01:30", "", "write 2026-10-25T01:30+01:00 or 2026-10-25T01:30+00:00"},
		{"Australia/Lord_Howe", "2026-04-05T01:45", "", "write 2026-04-05T01:45+11:00 or 2026-04-05T01:45+10:30"},
		{"UTC", "2026-02-30", "", "is no date"},
		{"UTC", "31.12.2026", "", "is no date; write 2026-12-31"},
		{"UTC", "", "", "is no date"},
		{"UTC", "2026-07-01T06:30:15", "", "not a whole minute"},
		{"UTC", "1492-10-12", "", "the year must be 1970 to 2199"},
		{"UTC", "9026-10-12T00:00Z", "", "the year must be 1970 to 2199"},
	} {
		got, err := Instant(tt.text, place(t, tt.zone))
		switch {
		case tt.err != "":
			wantError(t, tt.text, err, tt.err)
		case err != nil || got != at(t, tt.want):
			t.Errorf("%s in %s: %s, %v; want %s", tt.text, tt.zone, stamp(got), err, tt.want)
		}
	}
}
