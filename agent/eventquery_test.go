package agent

import (
	"errors"
	"net/url"
	"slices"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/store"
)

// What an event may be asked for by is held to what there is.
func TestEventQueriesAreChecked(t *testing.T) {
	for _, tt := range []struct {
		q    answer.EventQuery
		want string
	}{
		{answer.EventQuery{Kind: "warnings"}, `kind "warnings" is none; there are started, stopped`},
		{answer.EventQuery{From: "2026-12-02", To: "2026-12-01"}, "is not after"},
		{answer.EventQuery{Kind: eventShelved}, ""},
		{answer.EventQuery{}, ""},
	} {
		_, _, err := spanOf(&tt.q, time.UTC)
		if tt.want == "" && err != nil || tt.want != "" && (err == nil || !strings.Contains(err.Error(), tt.want)) {
			t.Errorf("%+v: %v, want %q", tt.q, err, tt.want)
		}
	}
}

// Pages have each event once, also where many are of one instant, and each record that cannot
// be read counts on one page.
func TestPagesOfEvents(t *testing.T) {
	damage := errors.New("checksum")
	type record struct {
		at     int64
		number uint64
		kind   string
		err    error
	}
	all := []record{
		{err: damage}, {at: 1, number: 3, kind: "a"}, {at: 5, number: 4, kind: "a"}, {err: damage}, {at: 5, number: 6, kind: "b"},
		{err: damage}, {at: 5, number: 7, kind: "a"}, {at: 5, number: 8, kind: "a"}, {at: 9, number: 2, kind: "a"}, {err: damage}, {at: 9, number: 5, kind: "b"}, {err: damage},
	}
	for limit := 1; limit <= 6; limit++ {
		var got []int64
		unused, pages := 0, 0
		for q := (answer.EventQuery{Kind: "a", Limit: limit}); ; pages++ {
			p := eventPage{query: q, zone: time.UTC}
			if err := p.begin(); err != nil {
				t.Fatal(err)
			}
			more := false
			for _, r := range all {
				if more = !p.take(&store.Event{At: r.at, Number: r.number, Kind: r.kind}, r.err); more {
					break
				}
			}
			if !more {
				p.out.Unused += p.damaged
			}
			for _, e := range p.out.Events {
				got = append(got, e.At.UnixNano())
			}
			if unused += p.out.Unused; p.out.Next == "" {
				break
			}
			next, err := url.Parse(p.out.Next)
			if err != nil {
				t.Fatal(err)
			}
			if q, err = answer.EventQueryOf(next.Query()); err != nil || q.Limit != limit || q.Kind != "a" {
				t.Fatalf("%+v, %v", q, err)
			}
		}
		if want := []int64{1, 5, 5, 5, 9}; !slices.Equal(got, want) || unused != 5 || pages != (len(want)-1)/limit {
			t.Errorf("by %d: events at %v, %d not read, %d pages more", limit, got, unused, pages)
		}
	}
}
