package agent

import (
	"context"
	"math"
	"net/http"
	"slices"
	"strings"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/store"
)

// eventsPath is where what happened is told.
const eventsPath = apiPath + "events"

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

// events answers q.
func (h *history) events(ctx context.Context, q answer.EventQuery) (*answer.Events, error) {
	zone := h.zone
	if zone == nil && q.Zone == "" {
		zone = time.UTC
	}
	zone, err := placeOf(q.Zone, zone)
	if err != nil {
		return nil, err
	}
	from, to, err := spanOf(&q, zone)
	if err != nil {
		return nil, err
	}
	out := &answer.Events{Site: h.site, Zone: zone.String(), Events: []answer.Event{}}
	for e, err := range h.db.Events(from, to) {
		switch {
		case ctx.Err() != nil:
			return nil, ctx.Err()
		case err != nil:
			out.Unused++
		case (q.Kind == "" || e.Kind == q.Kind) && (q.Subject == "" || e.Subject == q.Subject):
			out.Events = append(out.Events, toldEvent(&e, zone))
		}
	}
	return out, nil
}

func toldEvent(e *store.Event, zone *time.Location) answer.Event {
	told := answer.Event{At: time.Unix(0, e.At).In(zone), Kind: e.Kind, Subject: e.Subject, Text: e.Text}
	if e.Until != 0 {
		until := time.Unix(0, e.Until).In(zone)
		told.Until = &until
	}
	return told
}

// happenings tells events while the agent runs, to one at a time.
type happenings struct {
	history history
	turn    turn
}

func newEvents(r *reports) *happenings {
	return &happenings{history: r.history, turn: newTurn(atATime, "other events are being told; try again in a while")}
}

func (s *happenings) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	q, err := answer.EventQueryOf(r.URL.Query())
	if err != nil {
		refuse(w, err)
		return
	}
	ctx, cancel := context.WithTimeout(r.Context(), reportTime)
	defer cancel()
	allow(w, reportTime+reportStall)
	if !s.turn.taken(ctx, w) {
		return
	}
	defer s.turn.free()
	all, err := s.history.events(ctx, q)
	if err != nil {
		refuse(w, err)
		return
	}
	hand(w, r, all, reportStall)
}

// Happened tells the events of a history: a data folder, or a copy of its file. Where an agent
// runs on the folder, it is asked. What is wrong with q is a [*QueryError].
func Happened(ctx context.Context, data string, q answer.EventQuery) (e *answer.Events, err error) {
	err = reach(data, func(a address) (err error) {
		e, err = request[answer.Events](ctx, a, eventsPath, q.Values(), reportTime, answerBytes)
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
