package ingest

import (
	"context"
	"slices"
	"strings"
	"sync"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"
)

// mostStrays bounds the filters that are unsubscribed from in a session's life, and
// longestStray their bytes, about: a broker that sends what nobody asked for must not
// fill the memory.
const (
	mostStrays   = 4096
	longestStray = 256
)

// strays are the topics on which messages come though no tag reads them: mostly those of
// tags that the site no longer has, to which the broker's lasting session is still
// subscribed. MQTT has no way to ask for what it is subscribed to.
type strays struct {
	mu    sync.Mutex
	known map[string]bool // filters dealt with, or about to be
	due   []string
	some  chan struct{} // one slot: there is something due
}

func newStrays() *strays { return &strays{known: make(map[string]bool), some: make(chan struct{}, 1)} }

// note takes in a topic that nobody asked for.
func (s *strays) note(topic string) {
	if len(topic) > longestStray || checkTopic(topic) != nil {
		return // a broker may end the connection over a filter that cannot be
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.known[topic] || len(s.known) >= mostStrays {
		return
	}
	for _, f := range sources(topic) {
		if !s.known[f] {
			s.known[f] = true
			s.due = append(s.due, f)
		}
	}
	tell(s.some)
}

// sources are the filters by which a topic may be subscribed to: itself, and all below
// each of its levels. Unsubscribing from one that is not there does nothing.
func sources(topic string) []string {
	all := []string{topic, "#"}
	for i, c := range topic {
		if c == '/' {
			all = append(all, topic[:i]+"/#")
		}
	}
	return append(all, topic+"/#")
}

func (s *strays) take() []string {
	s.mu.Lock()
	defer s.mu.Unlock()
	due := s.due
	s.due = nil
	return due
}

// sweep unsubscribes from what is due until ctx ends.
func (s *Session) sweep(ctx context.Context, c mqtt.Client) {
	for {
		select {
		case <-s.strays.some:
		case <-ctx.Done():
			return
		}
		due := slices.DeleteFunc(s.strays.take(), func(f string) bool {
			return slices.ContainsFunc(s.topics, func(t *topic) bool { return t.name == f })
		})
		if len(due) > 0 {
			s.o.Log.Info("leaving topics of tags that are gone, which the broker's session still had", "topics", strings.Join(due[:min(5, len(due))], " "))
			s.unsubscribe(ctx, c, due)
		}
	}
}

// unsubscribe is in vain where the connection ends meanwhile; the next message on the
// topic comes after a restart of the agent at the latest.
func (s *Session) unsubscribe(ctx context.Context, c mqtt.Client, filters []string) {
	for chunk := range slices.Chunk(filters, filtersPerSubscribe) {
		token := c.Unsubscribe(chunk...)
		select {
		case <-token.Done():
		case <-ctx.Done():
			return
		case <-time.After(s.o.ConnectTimeout):
			return
		}
	}
}
