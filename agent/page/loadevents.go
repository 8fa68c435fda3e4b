package page

import (
	"context"
	"slices"
	"strconv"
	"time"

	"heatreeve/agent/answer"
)

// eventsPart tells what happened to a load, its tags and its exchangers, newest first.
type eventsPart struct {
	Fault  string
	Rows   []eventRow
	More   string // how many are left out
	Unused string
}

type eventRow struct {
	When, Lasted, Kind, Subject, Text string
	Link                              string // the course about it
}

// mostEvents is how many are shown.
const mostEvents = 40

func (s *loadSheet) events(ctx context.Context) *eventsPart {
	q := answer.EventQuery{From: s.address.begin(s.now).Format(addressMinute)}
	if !s.address.live() {
		q.To = s.address.end(s.now).Format(addressMinute)
	}
	p := &eventsPart{}
	newest := newestOf{subjects: s.subjects()}
	unused, err := s.source.Events(ctx, q, newest.take)
	if err != nil {
		p.Fault = why(err)
		return p
	}
	own := newest.all()
	if newest.left > 0 {
		p.More = strconv.Itoa(newest.left) + " earlier ones are left out; choose a shorter time."
	}
	if unused > 0 {
		p.Unused = strconv.Itoa(unused) + " records of what happened cannot be used."
	}
	for i := range own {
		p.Rows = append(p.Rows, s.eventRow(&own[i]))
	}
	return p
}

// newestOf keeps the newest events of some subjects, and of none, and counts those before.
type newestOf struct {
	subjects []string
	kept     []answer.Event
	left     int
}

func (x *newestOf) take(e *answer.Event) {
	if e.Subject != "" && !slices.Contains(x.subjects, e.Subject) {
		return
	}
	if len(x.kept) == 2*mostEvents {
		x.cut()
	}
	x.kept = append(x.kept, *e)
}

// cut leaves no more than are shown.
func (x *newestOf) cut() {
	n := max(0, len(x.kept)-mostEvents)
	x.left += n
	x.kept = slices.Delete(x.kept, 0, n)
}

// all are the events, newest first.
func (x *newestOf) all() []answer.Event {
	x.cut()
	slices.Reverse(x.kept)
	return x.kept
}

// subjects are whom events may tell of that matter to the load.
func (s *loadSheet) subjects() []string {
	names := []string{s.load.Name}
	for _, from := range s.load.Sources() {
		if !from.Constant() {
			names = append(names, s.site.Tags[from.Tag].Name)
		}
	}
	for i := range s.site.Exchangers {
		if x := &s.site.Exchangers[i]; x.Hot == s.index || x.Cold == s.index {
			names = append(names, x.Name)
		}
	}
	return names
}

func (s *loadSheet) eventRow(e *answer.Event) eventRow {
	r := eventRow{When: s.clock(e.At), Lasted: lasted(e), Kind: e.Kind, Subject: e.Subject, Text: e.Text}
	about := s.upTo(e.At.Truncate(time.Minute).Add(30 * time.Minute)).over(&spans[0])
	r.Link = about.minute(e.At.Truncate(time.Minute)).link("course")
	return r
}

// lasted is how long an event took; "" where it took no time.
func lasted(e *answer.Event) string {
	switch {
	case e.Until == nil:
		return "still"
	case e.Until.After(e.At):
		return duration(e.Until.Sub(e.At).Truncate(time.Second))
	}
	return ""
}
