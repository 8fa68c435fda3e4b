package answer

import (
	"net/url"
	"time"
)

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

func (q EventQuery) Values() url.Values {
	v := url.Values{}
	for name, field := range q.fields() {
		if *field != "" {
			v.Set(name, *field)
		}
	}
	return v
}

func EventQueryOf(v url.Values) (q EventQuery, err error) {
	fields := q.fields()
	for name, texts := range v {
		switch field := fields[name]; {
		case field == nil:
			return q, Wrongf("%s is no parameter; known: from, to, kind, subject, zone", name)
		case len(texts) != 1:
			return q, Wrongf("%s is given %d times", name, len(texts))
		default:
			*field = texts[0]
		}
	}
	return q, nil
}

// Event is what happened beside the accounts, such as a start of the agent.
type Event struct {
	At time.Time `json:"at"`
	// Until is At where it took no time, and null while it lasts.
	Until   *time.Time `json:"until"`
	Kind    string     `json:"kind"`
	Subject string     `json:"subject"` // name of a tag or load; may be empty
	Text    string     `json:"text"`
}
