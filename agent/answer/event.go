package answer

import (
	"net/url"
	"strconv"
	"time"
)

// EventQuery says which events are wanted.
type EventQuery struct {
	From, To      string // instants as [account.Instant] reads them; empty for all
	Kind, Subject string // empty for all
	Zone          string // IANA name of the time zone; empty for the site's
	Limit         int    // of a page; 0 for all
	After         string // where the page begins, as Next of the one before tells; empty for the first
}

// Events are what happened, by At.
type Events struct {
	Site   string  `json:"site"`
	Zone   string  `json:"zone"`
	Events []Event `json:"events"`
	Unused int     `json:"unused"`         // records among these that cannot be read
	Next   string  `json:"next,omitempty"` // where the next page is
}

// Following is where the next page is; empty for none.
func (e *Events) Following() string { return e.Next }

func (q *EventQuery) fields() map[string]*string {
	return map[string]*string{"from": &q.From, "to": &q.To, "kind": &q.Kind, "subject": &q.Subject, "zone": &q.Zone, "after": &q.After}
}

// Values are the parameters of q as the agent takes them.
func (q EventQuery) Values() url.Values {
	v := url.Values{}
	for name, field := range q.fields() {
		if *field != "" {
			v.Set(name, *field)
		}
	}
	if q.Limit != 0 {
		v.Set("limit", strconv.Itoa(q.Limit))
	}
	return v
}

// EventQueryOf reads the parameters back.
func EventQueryOf(v url.Values) (q EventQuery, err error) {
	var limit string
	fields := q.fields()
	fields["limit"] = &limit
	for name, texts := range v {
		switch field := fields[name]; {
		case field == nil:
			return q, Wrongf("%s is no parameter; known: from, to, kind, subject, zone, limit, after", name)
		case len(texts) != 1:
			return q, Wrongf("%s is given %d times", name, len(texts))
		default:
			*field = texts[0]
		}
	}
	q.Limit, err = limitOf(limit)
	return q, err
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
