package ingest

import (
	"context"
	"errors"
	"fmt"
	"strings"
)

// Heard is a message as the broker delivered it.
type Heard struct {
	Topic    string
	Payload  []byte // good until the handler returns; cut one byte beyond [sparkplug.MaxPayload]
	Retained bool
	At       int64
}

// Listen takes in all messages of some topic filters, undecoded, and hands them to hear,
// one after the other and in the broker's order, until ctx ends; then it returns nil. It
// keeps no session at the broker and asks for quality of service 0, so that it holds
// nothing up and leaves nothing behind; a message that comes while hear is busy for long
// may be dropped by the broker. ClientID must be one that nobody else uses.
//
// The error is that of the first attempt to connect, or says that the broker grants none
// of the filters. A connection lost later is made anew.
func Listen(ctx context.Context, o Options, filters []string, hear func(Heard)) error {
	if err := CheckListening(o, filters); err != nil {
		return err
	}
	o, _ = o.withDefaults()
	b, _ := parseBroker(o.URL)
	ctx, end := context.WithCancelCause(ctx)
	defer end(nil)
	o.Transient = true
	s := &Session{o: o, broker: b, decoder: &Decoder{}, strays: newStrays(), inbox: newInbox(0, 0), outbox: newOutbox(o.Outbox), tally: newTally(0)}
	s.listening = &listening{
		hear: hear,
		refused: func(why string) {
			if s.Stats().Connections == 0 {
				end(errors.New(why))
			}
		},
		granted: func(n int) {
			if n == 0 {
				end(fmt.Errorf("the broker grants none of the topic filters %s; check its access list", strings.Join(filters, ", ")))
			}
		},
	}
	for _, f := range filters {
		s.topics = append(s.topics, &topic{name: f})
	}
	if err := s.Run(ctx); err != nil {
		return err
	}
	if why := context.Cause(ctx); !errors.Is(why, context.Canceled) && !errors.Is(why, context.DeadlineExceeded) {
		return fmt.Errorf("%s: %w", b, why)
	}
	return nil
}

// CheckListening returns every fault of what [Listen] is to be given, joined.
func CheckListening(o Options, filters []string) error {
	_, wrong := o.withDefaults()
	faults := []error{wrong}
	if len(filters) == 0 {
		faults = append(faults, errors.New("no topic filter; give one, such as # for all topics"))
	}
	for _, f := range filters {
		faults = append(faults, checkFilter(f))
	}
	return errors.Join(faults...)
}

// listening is what a session does that hands messages on as they are.
type listening struct {
	hear    func(Heard)
	refused func(why string) // an attempt to connect failed
	granted func(n int)      // so many filters were, on a new connection
}
