package survey

import (
	"bytes"
	"maps"
	"slices"
	"unicode/utf8"

	"github.com/go-json-experiment/json/jsontext"

	"heatreeve/ingest"
)

// Shape is how the payloads of a topic are made.
type Shape string

const (
	Nothing Shape = "empty"  // no payload, or blanks
	Bare    Shape = "number" // nothing but a number
	Truth   Shape = "true or false"
	Words   Shape = "text" // printable, and no JSON
	JSON    Shape = "JSON" // an object or a list
	Plug    Shape = "Sparkplug B"
	Bytes   Shape = "bytes"    // not printable
	Mixed   Shape = "mixed"    // now one, now another
	TooLong Shape = "too long" // more than is read of a payload
)

// topic is what is known of one.
type topic struct {
	name               string
	messages, retained int
	first, last        int64 // arrivals of live messages
	longestGap         int64
	live               int
	largest            int // payload, bytes
	shape              Shape
	text               string             // the beginning of the last one that was no number and no JSON
	series             map[string]*series // by pointer; "" of a bare payload
	room               *int               // places that may still be looked at, of all topics
	crowded            bool               // there were more places than are looked at
	plug               bool               // it is an edge node or device of Sparkplug, and series are its metrics
}

func newTopic(name string, room *int) *topic {
	return &topic{name: name, room: room, series: make(map[string]*series)}
}

func (t *topic) hear(m Message) {
	t.count(m)
	shape := t.look(&m)
	switch {
	case t.messages == 1:
		t.shape = shape
	case t.shape != shape:
		t.shape = Mixed
	}
}

// count takes in that a message came.
func (t *topic) count(m Message) {
	t.messages++
	t.largest = max(t.largest, len(m.Payload))
	if m.Retained {
		t.retained++
	} else {
		if t.live++; t.live == 1 {
			t.first = m.At
		} else {
			t.longestGap = max(t.longestGap, m.At-t.last)
		}
		t.last = m.At
	}
}

// look takes a payload apart and returns its shape.
func (t *topic) look(m *Message) Shape {
	text := bytes.TrimSpace(m.Payload)
	switch {
	case len(m.Payload) > ingest.MaxPayload:
		return TooLong
	case len(text) == 0:
		return Nothing
	case text[0] == '{' || text[0] == '[':
		if leaves(text, func(pointer string, kind jsontext.Kind, raw []byte) { t.at(pointer, kind, raw, m) }) {
			return JSON
		}
	default:
		if _, ok := ingest.Number(text); ok {
			t.at("", '0', text, m)
			return Bare
		}
		if is := string(text); is == "true" || is == "false" {
			t.at("", jsontext.Kind(text[0]), text, m)
			return Truth
		}
	}
	if !utf8.Valid(text) || bytes.ContainsFunc(text, func(r rune) bool { return r < ' ' && r != '\t' && r != '\n' && r != '\r' }) {
		return Bytes
	}
	t.text = sample(text)
	return Words
}

// at takes in the value at one place.
func (t *topic) at(pointer string, kind jsontext.Kind, raw []byte, m *Message) {
	if s := t.place(pointer); s != nil {
		s.hear(kind, raw, m)
	}
}

// place is what came at one place so far; nil where there is no room for it.
func (t *topic) place(at string) *series {
	s := t.series[at]
	if s == nil {
		if len(t.series) >= MostSeries || *t.room <= 0 {
			t.crowded = true
			return nil
		}
		*t.room--
		s = new(series)
		t.series[at] = s
	}
	return s
}

// Topic is what was found out about one topic.
type Topic struct {
	Name     string `json:"topic"` // of a Sparkplug source group/node or group/node/device
	Shape    Shape  `json:"payload"`
	Messages int    `json:"messages"`
	Retained int    `json:"retained"` // of them, kept by the broker from before
	Largest  int    `json:"largest_bytes"`
	// Every is the mean time between live messages and Gap the longest, s; 0 where
	// fewer than two came.
	Every float64 `json:"every_s"`
	Gap   float64 `json:"longest_gap_s"`
	// Text is the beginning of the last payload that was text.
	Text string `json:"text,omitempty"`
	// Hurdles are what keeps numbers of it from being read, each with an example.
	Hurdles map[Hurdle]string `json:"hurdles,omitempty"`
	// Crowded tells that its payloads have more places than were looked at.
	Crowded bool     `json:"crowded,omitempty"`
	Signals []Signal `json:"signals"`
}

// tell sums up what is known of the topic.
func (t *topic) tell() Topic {
	told := Topic{Name: t.name, Shape: t.shape, Messages: t.messages, Retained: t.retained, Largest: t.largest, Text: t.text, Crowded: t.crowded}
	if t.live > 1 {
		told.Every = float64(t.last-t.first) / float64(t.live-1) / 1e9
		told.Gap = float64(t.longestGap) / 1e9
	}
	for _, pointer := range slices.Sorted(maps.Keys(t.series)) {
		if t.measures(pointer) {
			told.Signals = append(told.Signals, t.signal(pointer))
		}
	}
	if all := t.hurdles(); len(all) > 0 {
		told.Hurdles = all
	}
	return told
}
