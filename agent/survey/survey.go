// Package survey finds out what a broker carries: which topics there are, how their
// payloads are made, how often and with what stamps they come, what they probably
// measure, and why it is thought so. It writes a draft of the tags and loads of a site
// file, in which what only an engineer can know is marked.
//
// It listens only, and keeps no payload. What it remembers is bounded: of each topic the
// [MostSeries] values met first, and of topics as many as it is told.
package survey

import (
	"maps"
	"slices"
	"strings"
	"sync"
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
	messages uint64
	beyond   uint64 // messages of topics beyond most
}

// New returns an empty survey of at most so many topics; 0 stands for [DefaultTopics].
func New(most int) *Survey {
	if most <= 0 {
		most = DefaultTopics
	}
	return &Survey{most: most, topics: make(map[string]*topic)}
}

// Hear takes in one message. Those of the broker about itself ($SYS) are left out.
func (s *Survey) Hear(m Message) {
	if strings.HasPrefix(m.Topic, "$") {
		return
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	s.messages++
	t := s.topics[m.Topic]
	if t == nil {
		if len(s.topics) >= s.most {
			s.beyond++
			return
		}
		t = newTopic(m.Topic)
		s.topics[m.Topic] = t
	}
	t.hear(m)
}

// Progress is how far a survey has come.
type Progress struct {
	Topics   int
	Messages uint64
	// Beyond counts the messages on topics for which there was no room.
	Beyond uint64
}

// Progress returns the counts so far.
func (s *Survey) Progress() Progress {
	s.mu.Lock()
	defer s.mu.Unlock()
	return Progress{Topics: len(s.topics), Messages: s.messages, Beyond: s.beyond}
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
