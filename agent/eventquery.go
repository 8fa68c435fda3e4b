package agent

import (
	"context"
	"math"
	"net/http"
	"net/url"
	"slices"
	"strings"
	"time"

	"heatreeve/agent/account"
	"heatreeve/store"
)

// eventsPath is where what happened is told.
const eventsPath = "/events"

// EventQuery says which events are wanted.
type EventQuery struct {
	From, To      string // instants as [account.Instant] reads them; empty for all
	Kind, Subject string // empty for all
	Zone          string // IANA name of the time zone; empty for the site's
}

// Events are what happened, by At.
type Events struct {
	Site   string  `json:"site"`
	Zone   string  `json:"zone"`
	Events []Event `json:"events"`
	Unused int     `json:"unused"` // records that cannot be read
}

func (q *EventQuery) fields() map[string]*string {
	return map[string]*string{"from": &q.From, "to": &q.To, "kind": &q.Kind, "subject": &q.Subject, "zone": &q.Zone}
}

func (q EventQuery) values() url.Values {
	v := url.Values{}
	for name, field := range q.fields() {
		if *field != "" {
			v.Set(name, *field)
		}
	}
	return v
}

func eventQueryOf(v url.Values) (q EventQuery, err error) {
	fields := q.fields()
	for name, texts := range v {
		switch field := fields[name]; {
		case field == nil:
			return q, queryErrorf("%s is no parameter; known: from, to, kind, subject, zone", name)
		case len(texts) != 1:
			return q, queryErrorf("%s is given %d times", name, len(texts))
		default:
			*field = texts[0]
		}
	}
	return q, nil
}

// eventKinds are those that there are.
var eventKinds = []string{
	eventStarted, eventStopped, eventRules, eventState, eventDisk, eventLost, eventClock, eventDamage,
	eventWarning, eventAcknowledged, eventShelved, eventUnshelved,
}

// span is the time that q asks for.
func (q *EventQuery) span(zone *time.Location) (from, to int64, err error) {
	if q.Kind != "" && !slices.Contains(eventKinds, q.Kind) {
		return 0, 0, queryErrorf("kind %q is none; there are %s", q.Kind, strings.Join(eventKinds, ", "))
	}
	from, to = math.MinInt64, math.MaxInt64
	if q.From != "" {
		if from, err = account.Instant(q.From, zone); err != nil {
			return 0, 0, queryErrorf("from %v", err)
		}
	}
	if q.To != "" {
		if to, err = account.Instant(q.To, zone); err != nil {
			return 0, 0, queryErrorf("to %v", err)
		}
	}
	if from >= to {
		return 0, 0, queryErrorf("to %s is not after from %s", q.To, q.From)
	}
	return from, to, nil
}

// events answers q.
func (h *history) events(ctx context.Context, q EventQuery) (*Events, error) {
	zone := h.zone
	if zone == nil && q.Zone == "" {
		zone = time.UTC
	}
	zone, err := Query{Zone: q.Zone}.place(zone)
	if err != nil {
		return nil, err
	}
	from, to, err := q.span(zone)
	if err != nil {
		return nil, err
	}
	out := &Events{Site: h.site, Zone: zone.String(), Events: []Event{}}
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

func toldEvent(e *store.Event, zone *time.Location) Event {
	told := Event{At: time.Unix(0, e.At).In(zone), Kind: e.Kind, Subject: e.Subject, Text: e.Text}
	if e.Until != 0 {
		until := time.Unix(0, e.Until).In(zone)
		told.Until = &until
	}
	return told
}

// happenings tells events while the agent runs, to one at a time.
type happenings struct {
	history history
	run     string
	turn    turn
}

func newEvents(r *reports) *happenings {
	return &happenings{history: r.history, run: r.run, turn: make(turn, 1)}
}

func (s *happenings) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	tellRun(w, r, s.run)
	q, err := eventQueryOf(r.URL.Query())
	if err != nil {
		refuse(w, err)
		return
	}
	if !s.turn.taken(w, "other events are being told; try again in a while") {
		return
	}
	defer s.turn.free()
	all, err := s.history.events(r.Context(), q)
	if err != nil {
		refuse(w, err)
		return
	}
	writeJSON(w, all)
}

// Happened tells the events of a history: a data folder, or a copy of its file. Where an agent
// runs on the folder, it is asked. What is wrong with q is a [*QueryError].
func Happened(ctx context.Context, data string, q EventQuery) (e *Events, err error) {
	err = reach(data, func(a address) (err error) {
		e, err = request[Events](ctx, a, eventsPath, q.values(), reportTime, answerBytes)
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
