// Package survey finds out what a broker carries: which topics there are, how their
// payloads are made, how often and with what stamps they come, what they probably
// measure, and why it is thought so. It writes a draft of the tags and loads of a site
// file, in which what only an engineer can know is marked.
//
// It listens only, and keeps no payload but the beginning of a text. What it remembers is bounded: of each topic the
// [MostSeries] values met first, and of topics as many as it is told.
// Sparkplug B is read too: there an edge node or device stands for a topic, and its metrics
// for values.
package survey

import (
	"maps"
	"slices"
	"strings"
	"sync"

	"heatreeve/ingest/sparkplug"
)

// Message is one as a broker delivered it.
type Message struct {
	Topic    string
	Payload  []byte // not kept
	Retained bool
	At       int64 // arrival, Unix nanoseconds
}

// DefaultTopics is how many topics are looked into unless told otherwise.
const DefaultTopics = 20_000

// Survey gathers what messages tell. Hear, Progress and Topics may be called from
// several goroutines.
type Survey struct {
	most int

	mu       sync.Mutex
	topics   map[string]*topic
	plug     *plug
	messages uint64
	room     int    // places that may still be looked at
	beyond   uint64 // messages of topics beyond most
}

// New returns an empty survey of at most so many topics; 0 stands for [DefaultTopics].
func New(most int) *Survey {
	if most <= 0 {
		most = DefaultTopics
	}
	return &Survey{most: most, room: mostInAll, topics: make(map[string]*topic), plug: newPlug()}
}

// Hear takes in one message. Those of the broker about itself ($SYS) are left out.
func (s *Survey) Hear(m Message) {
	if strings.HasPrefix(m.Topic, "$") {
		return
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	s.messages++
	if at, ok := sparkplug.ParseTopic(m.Topic); ok {
		s.hearPlug(at, m)
		return
	}
	if t := s.topic(m.Topic); t != nil {
		t.hear(m)
	} else {
		s.beyond++
	}
}

// topic is what is known of one; nil where there is no room for it.
func (s *Survey) topic(name string) *topic {
	t := s.topics[name]
	if t == nil && len(s.topics) < s.most {
		t = newTopic(name, &s.room)
		s.topics[name] = t
	}
	return t
}

// Progress is how far a survey has come.
type Progress struct {
	Topics   int
	Messages uint64
	// Beyond counts the messages on topics for which there was no room.
	Beyond uint64
	// Unnamed counts how often a Sparkplug metric came under an alias that no birth had told
	// since the survey began until then, and Malformed the messages of that namespace that
	// could not be read.
	Unnamed, Malformed uint64
}

// Progress returns the counts so far.
func (s *Survey) Progress() Progress {
	s.mu.Lock()
	defer s.mu.Unlock()
	c := s.plug.space.Counts()
	return Progress{Topics: len(s.topics), Messages: s.messages, Beyond: s.beyond, Unnamed: c.UnknownAlias, Malformed: c.Malformed}
}

// Topics returns what was found, by name.
func (s *Survey) Topics() []Topic {
	s.mu.Lock()
	defer s.mu.Unlock()
	found := make([]Topic, 0, len(s.topics))
	for _, name := range slices.Sorted(maps.Keys(s.topics)) {
		found = append(found, s.topics[name].tell())
	}
	nameTags(found)
	return found
}
