package agent

import (
	"fmt"
	"net/url"
	"slices"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/agent/design"
	"heatreeve/agent/warn"
	"heatreeve/store"
	"heatreeve/thermo/unit/near"
)

// What an operator may do about warnings.
const (
	Acknowledge = "acknowledge"
	Shelve      = "shelve"
	Unshelve    = "unshelve"
)

// Order is what an operator does about the warnings on a subject.
type Order struct {
	Do         string // Acknowledge, Shelve or Unshelve
	Subject    string // load or exchanger
	Kind       string // of warning; empty for all that there are
	By, Reason string
	Until      string        // of a shelf: instant as [account.Moment] reads it
	For        time.Duration // or for how long; 0 with no Until is eight hours
}

// Done tells what an [Order] has come to: a line each.
type Done struct {
	Lines []string `json:"done"`
}

func (o *Order) fields() map[string]*string {
	return map[string]*string{"do": &o.Do, "subject": &o.Subject, "kind": &o.Kind, "by": &o.By, "reason": &o.Reason, "until": &o.Until}
}

func (o Order) values() url.Values {
	v := url.Values{}
	for name, field := range o.fields() {
		if *field != "" {
			v.Set(name, *field)
		}
	}
	if o.For != 0 {
		v.Set("for", o.For.String())
	}
	return v
}

// orderOf reads the parameters back.
func orderOf(v url.Values) (o Order, err error) {
	fields := o.fields()
	for name, texts := range v {
		field := fields[name]
		switch {
		case len(texts) != 1:
			return o, answer.Wrongf("%s is given %d times", name, len(texts))
		case name == "for":
			if o.For, err = time.ParseDuration(texts[0]); err != nil {
				return o, answer.Wrongf("for %q is no length of time; write 8h", texts[0])
			}
		case field == nil:
			return o, answer.Wrongf("%s is no parameter; known: do, subject, kind, by, reason, until, for", name)
		default:
			*field = texts[0]
		}
	}
	return o, nil
}

// kinds are those that the order is about, of what is watched.
func (o *Order) kinds(watched []warn.Watched) ([]design.Kind, error) {
	var subjects, words []string
	var kinds []design.Kind
	for _, w := range watched {
		subjects = append(subjects, w.Subject)
		if w.Subject == o.Subject {
			words = append(words, string(w.Kind))
			if o.Kind == "" || string(w.Kind) == o.Kind {
				kinds = append(kinds, w.Kind)
			}
		}
	}
	subjects = slices.Compact(subjects)
	switch {
	case len(kinds) > 0:
		return kinds, nil
	case len(words) > 0:
		return nil, answer.Wrongf("kind %q: on %q there are %s", o.Kind, o.Subject, listed(words))
	case len(near.Names(o.Subject, subjects)) > 0:
		return nil, answer.Wrongf("subject %q is not watched; did you mean %q?", o.Subject, near.Names(o.Subject, subjects)[0])
	case len(subjects) == 0:
		return nil, answer.Wrongf("subject %q is not watched, nor is any other: no load has a design", o.Subject)
	}
	return nil, answer.Wrongf("subject %q is not watched; there are: %s", o.Subject, listed(subjects))
}

// marking carries orders out on a roll, at an instant by a clock of a place.
type marking struct {
	roll    *warn.Roll
	watched []warn.Watched
	place   *time.Location
	at      int64
	number  func() uint64
}

// carryOut does it and returns the events that tell of it.
func (m *marking) carryOut(o Order) ([]store.Event, error) {
	mark := warn.Mark{By: o.By, Reason: o.Reason, At: m.at}
	switch o.Do {
	case Acknowledge:
		return m.acknowledge(o, mark)
	case Shelve:
		return m.shelve(o, mark)
	case Unshelve:
		ended, err := m.roll.Unshelve(o.Subject, design.Kind(o.Kind), mark)
		if err != nil {
			return nil, answer.Wrongf("%v", err)
		}
		var events []store.Event
		for _, s := range ended {
			events = append(events, m.event(eventUnshelved, o.Subject, fmt.Sprintf("%s, by %s: %s", s.Kind, o.By, o.Reason)))
		}
		return events, nil
	}
	return nil, answer.Wrongf("do %q: allowed are %s, %s, %s", o.Do, Acknowledge, Shelve, Unshelve)
}

func (m *marking) acknowledge(o Order, mark warn.Mark) (events []store.Event, err error) {
	marked, err := m.roll.Acknowledge(o.Subject, design.Kind(o.Kind), mark)
	if err != nil {
		return nil, answer.Wrongf("%v", err)
	}
	for i := range marked {
		events = append(events, m.event(eventAcknowledged, o.Subject, fmt.Sprintf("%s, by %s: %s", marked[i].Kind, o.By, o.Reason)))
	}
	return events, nil
}

func (m *marking) shelve(o Order, mark warn.Mark) (events []store.Event, err error) {
	kinds, err := o.kinds(m.watched)
	if err != nil {
		return nil, err
	}
	until, err := o.until(m.at, m.place)
	if err != nil {
		return nil, err
	}
	for _, k := range kinds {
		s := warn.Shelf{Subject: o.Subject, Kind: k, Until: until, Mark: mark}
		if err := m.roll.Shelve(s); err != nil {
			return nil, answer.Wrongf("%v", err)
		}
		events = append(events, m.event(eventShelved, o.Subject, s.Text(m.place)))
	}
	return events, nil
}

// until is the end of a shelf.
func (o *Order) until(now int64, place *time.Location) (int64, error) {
	switch {
	case o.Until != "" && o.For != 0:
		return 0, answer.Wrongf("until and for are given; one of them tells the end")
	case o.Until != "":
		at, err := account.Moment(o.Until, place)
		if err != nil {
			return 0, answer.Wrongf("until %v", err)
		}
		return at, nil
	case o.For != 0:
		return now + int64(o.For), nil
	}
	return now + warn.ShelfTime, nil
}

func (m *marking) event(kind, subject, text string) store.Event {
	return store.Event{At: m.at, Until: m.at, Number: m.number(), Kind: kind, Subject: subject, Text: text}
}

func done(events []store.Event) Done {
	var d Done
	for _, e := range events {
		d.Lines = append(d.Lines, fmt.Sprintf("%s %s: %s", e.Kind, e.Subject, e.Text))
	}
	return d
}
