package agent

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"net/http"
	"net/url"
	"slices"
	"strconv"
	"strings"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/store"
)

// eventsPath is where what happened is told.
const eventsPath = answer.Path + "events"

// eventKinds are those that there are.
var eventKinds = []string{
	eventStarted, eventStopped, eventRules, eventState, eventDisk, eventLost, eventClock, eventDamage,
	eventWarning, eventAcknowledged, eventShelved, eventUnshelved,
}

// span is the time that q asks for.
func spanOf(q *answer.EventQuery, zone *time.Location) (from, to int64, err error) {
	if q.Kind != "" && !slices.Contains(eventKinds, q.Kind) {
		return 0, 0, answer.Wrongf("kind %q is none; there are %s", q.Kind, strings.Join(eventKinds, ", "))
	}
	from, to = math.MinInt64, math.MaxInt64
	if q.From != "" {
		if from, err = account.Instant(q.From, zone); err != nil {
			return 0, 0, answer.Wrongf("from %v", err)
		}
	}
	if q.To != "" {
		if to, err = account.Instant(q.To, zone); err != nil {
			return 0, 0, answer.Wrongf("to %v", err)
		}
	}
	if from >= to {
		return 0, 0, answer.Wrongf("to %s is not after from %s", q.To, q.From)
	}
	return from, to, nil
}

// eventTime is the zone and the time that q asks for.
func (h *history) eventTime(q *answer.EventQuery) (zone *time.Location, from, to int64, err error) {
	zone = h.zone
	if zone == nil && q.Zone == "" {
		zone = time.UTC
	}
	if zone, err = placeOf(q.Zone, zone); err != nil {
		return nil, 0, 0, err
	}
	from, to, err = spanOf(q, zone)
	return zone, from, to, err
}

// eachEvent tells all events of the time that q asks for, and how many records of it cannot be
// read; it keeps none.
func (h *history) eachEvent(ctx context.Context, q answer.EventQuery, tell func(*answer.Event)) (unused int, err error) {
	zone, from, to, err := h.eventTime(&q)
	if err != nil {
		return 0, err
	}
	for e, err := range h.db.Events(from, to) {
		switch {
		case ctx.Err() != nil:
			return unused, ctx.Err()
		case err != nil:
			unused++
		default:
			told := toldEvent(&e, zone)
			tell(&told)
		}
	}
	return unused, nil
}

// events answers q.
func (h *history) events(ctx context.Context, q answer.EventQuery) (*answer.Events, error) {
	zone, from, to, err := h.eventTime(&q)
	if err != nil {
		return nil, err
	}
	p := eventPage{query: q, zone: zone, out: answer.Events{Site: h.site, Zone: zone.String(), Events: []answer.Event{}}}
	if err := p.begin(); err != nil {
		return nil, err
	}
	for e, err := range h.db.Events(from, to) {
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		if !p.take(&e, err) {
			return &p.out, nil
		}
	}
	p.out.Unused += p.damaged
	return &p.out, nil
}

// eventPage is a page of events in the making.
type eventPage struct {
	query   answer.EventQuery
	zone    *time.Location
	at      int64 // of the event behind which the page begins, which bears the number
	number  uint64
	last    store.Event // on the page
	damaged int         // records since then that cannot be read
	out     answer.Events
}

// begin reads where the page begins.
func (p *eventPage) begin() error {
	p.at = math.MinInt64
	if p.query.After == "" {
		return nil
	}
	at, number, _ := strings.Cut(p.query.After, ".")
	var err, err2 error
	p.at, err = strconv.ParseInt(at, 10, 64)
	p.number, err2 = strconv.ParseUint(number, 10, 64)
	if err != nil || err2 != nil {
		return answer.Wrongf("after %q is no place among events; take it from next of the page before", p.query.After)
	}
	return nil
}

// take puts an event on the page where it belongs there; false once the page is full, and there
// are more. A record that cannot be read counts on the page that goes past it.
func (p *eventPage) take(e *store.Event, err error) bool {
	q := &p.query
	switch {
	case err != nil:
		p.damaged++
	case cmp.Or(cmp.Compare(e.At, p.at), cmp.Compare(e.Number, p.number)) <= 0:
		p.damaged = 0
	case q.Kind != "" && e.Kind != q.Kind, q.Subject != "" && e.Subject != q.Subject:
	case q.Limit > 0 && len(p.out.Events) == q.Limit:
		next := *q
		next.After = fmt.Sprintf("%d.%d", p.last.At, p.last.Number)
		p.out.Next = eventsPath + "?" + next.Values().Encode()
		return false
	default:
		p.out.Events = append(p.out.Events, toldEvent(e, p.zone))
		p.out.Unused, p.damaged, p.last = p.out.Unused+p.damaged, 0, *e
	}
	return true
}

func toldEvent(e *store.Event, zone *time.Location) answer.Event {
	told := answer.Event{At: time.Unix(0, e.At).In(zone), Kind: e.Kind, Subject: e.Subject, Text: e.Text}
	if e.Until != 0 {
		until := time.Unix(0, e.Until).In(zone)
		told.Until = &until
	}
	return told
}

// newEvents tells events by pages.
func newEvents(h history) http.Handler {
	return &queries[answer.EventQuery, answer.Events]{
		turn: newTurn(atATime, "other events are being told; try again in a while"),
		read: answer.EventQueryOf,
		answer: func(ctx context.Context, q answer.EventQuery) (*answer.Events, error) {
			q.Limit = cmp.Or(q.Limit, answer.UsualPage)
			return h.events(ctx, q)
		},
	}
}

// Happened tells the events of a history: a data folder, or a copy of its file. Where an agent
// runs on the folder, it is asked. What is wrong with q is a [*QueryError].
func Happened(ctx context.Context, data string, q answer.EventQuery) (e *answer.Events, err error) {
	err = reach(data, func(a address) (err error) {
		e, err = a.happened(ctx, q)
		return err
	}, func(h history) (err error) {
		e, err = h.events(ctx, q)
		return err
	})
	if err != nil {
		return nil, err
	}
	return e, nil
}

// happened has the agent at a tell all events that q asks for, page by page.
func (a address) happened(ctx context.Context, q answer.EventQuery) (*answer.Events, error) {
	all := &answer.Events{Events: []answer.Event{}}
	for q.Limit = answer.MostPage; ; {
		e, err := request[answer.Events](ctx, a, eventsPath, q.Values(), reportTime, answerBytes)
		if err != nil {
			return nil, err
		}
		all.Site, all.Zone, all.Unused = e.Site, e.Zone, all.Unused+e.Unused
		all.Events = append(all.Events, e.Events...)
		if e.Next == "" {
			return all, nil
		}
		next, err := url.Parse(e.Next)
		if err != nil {
			return nil, fmt.Errorf("agent at %s: its next page: %w", a.hostPort, err)
		}
		after := next.Query().Get("after")
		if len(e.Events) == 0 || after == q.After {
			return nil, fmt.Errorf("agent at %s: its events come to no end at %q", a.hostPort, after)
		}
		q.After = after
	}
}
