package ingest

import (
	"context"
	"math"
	"time"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/sparkplug"
)

// debts are readings of Sparkplug metrics that found no room. The broker does not keep
// such messages, and a source says a thing once; so, as soon as there is room, each tag is
// told that it has no value from the first of them on. Whether a source is alive is told
// as it was last.
type debts map[int]Reading

// note takes in what found no room.
func (d debts) note(tags []Tag, out []Outcome) {
	for i := range out {
		r := out[i].Reading
		tag := &tags[r.Tag]
		if !out[i].kept() || tag.Metric == nil {
			continue
		}
		if before, ok := d[r.Tag]; ok && tag.Liveness == nil && before.At < r.At {
			continue
		}
		if tag.Liveness == nil && r.Mark.Quality() != quality.Bad {
			r.Value, r.Mark = math.NaN(), quality.NoValue
		}
		d[r.Tag] = r
	}
}

// pay appends what is owed, and owes it no more.
func (d debts) pay(out []Outcome) []Outcome {
	for tag, r := range d {
		out = append(out, Outcome{Reading: r})
		delete(d, tag)
	}
	return out
}

// departed tells that nothing is known of the namespace any more, where a connection has
// been lost.
func (s *Session) departed(ctx context.Context) {
	if s.decoder.plug == nil || s.link.Load() == nil {
		return
	}
	now := s.o.Now().UnixNano()
	out := s.decoder.plug.lost(now, s.outcomes[:0])
	s.outcomes = out
	if len(out) == 0 {
		return
	}
	if !s.inbox.put(ctx, nil, out) {
		s.owed.note(s.tags, out)
		s.overflow(out, nil, now)
	}
	s.tally.count(now, out)
}

// tellRefused logs the first of each kind of Sparkplug message that is refused as a whole.
func (s *Session) tellRefused() {
	before, after := s.told, s.decoder.plug.stats()
	s.told = after
	if before.Last == "" && after.Last != "" {
		s.o.Log.Warn("message refused that is to be Sparkplug B; more of this kind are only counted", "refusal", after.Last)
	}
	if before.Retained == 0 && after.Retained > 0 {
		s.o.Log.Warn("the broker keeps Sparkplug messages, which the standard forbids; they are left out and counted. Clear them, and let the publisher not retain")
	}
}

// askEvery is how often it is looked whom to ask for a birth.
const askEvery = time.Second

// ask sends requests for births that are due, until ctx ends.
func (s *Session) ask(ctx context.Context) {
	ticker := time.NewTicker(askEvery)
	defer ticker.Stop()
	for {
		select {
		case <-ticker.C:
		case <-ctx.Done():
			return
		}
		now := s.o.Now().UnixNano()
		for _, node := range s.decoder.plug.due(now) {
			// A node whose topic cannot be published to could not be subscribed to either.
			_, _ = s.Publish(Message{Topic: node.Topic(sparkplug.NCommand), Payload: sparkplug.RebirthRequest(now)})
		}
	}
}

// HostPresence is that of a Sparkplug host application: its STATE, with the instant of the
// attempt to connect.
func HostPresence(id string) *Presence {
	state := func(online bool) func(time.Time) []byte {
		return func(at time.Time) []byte {
			return sparkplug.State{Online: online, Timestamp: at.UnixMilli()}.Payload()
		}
	}
	return &Presence{Topic: sparkplug.StateTopic(id), Online: state(true), Offline: state(false)}
}

// contradict says again that this host is online, where a message on its own topic says
// that it is not: the will of a connection before comes after its successor's greeting.
func (s *Session) contradict(payload []byte) {
	state, err := sparkplug.ParseState(payload)
	if err != nil || !state.Online {
		s.outbox.put(s.online())
	}
}
