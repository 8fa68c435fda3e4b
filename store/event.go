package store

import (
	"encoding/binary"
	"strings"
	"unicode/utf8"
)

// What is longer of an event's texts is cut, at the end of a character, so that no event
// can take much room. All are in bytes.
const (
	mostKind    = 32
	mostSubject = 256
	mostText    = 1024
)

// Event is something that whoever looks at the accounts will want to know beside them. At is
// when it began and Until when it ended (Unix nanoseconds), which is At where it took no
// time; 0 is one that still lasts. Number tells events of one instant apart, see
// [Store.NextEvent]. Kind is a short word, Subject the name of a tag or load or empty, and
// Text is for people; of these, 32, 256 and 1024 bytes are kept.
type Event struct {
	At, Until           int64
	Number              uint64
	Kind, Subject, Text string
}

// overlaps tells whether e has a part in from <= t < to.
func (e *Event) overlaps(from, to int64) bool {
	return e.At < to && (e.At >= from || e.Until == 0 || e.Until > from)
}

// kept is e as the file holds it.
func (e Event) kept() Event {
	e.Kind, e.Subject, e.Text = cut(e.Kind, mostKind), cut(e.Subject, mostSubject), cut(e.Text, mostText)
	return e
}

// cut returns no more than n bytes of text, as UTF-8.
func cut(text string, n int) string {
	text = strings.ToValidUTF8(text, "\ufffd")
	if len(text) <= n {
		return text
	}
	for !utf8.RuneStart(text[n]) {
		n--
	}
	return text[:n]
}

func eventKey(at int64, number uint64) []byte {
	return binary.BigEndian.AppendUint64(binary.BigEndian.AppendUint64(nil, uint64(at)^1<<63), number)
}

// appendEvent adds the record of e, whose key is key, to b, which is empty.
func appendEvent(b, key []byte, e Event) []byte {
	b = binary.LittleEndian.AppendUint64(b, uint64(e.Until))
	for _, text := range []string{e.Kind, e.Subject, e.Text} {
		b = binary.AppendUvarint(b, uint64(len(text)))
		b = append(b, text...)
	}
	return binary.LittleEndian.AppendUint32(b, checksum(key, b))
}

func parseEvent(key, value []byte) (e Event, err error) {
	n := len(value) - 4
	if len(key) != 16 || n < 8 || binary.LittleEndian.Uint32(value[n:]) != checksum(key, value[:n]) {
		return e, errRecord
	}
	p := parser{rest: value[8:n]}
	kind, subject, text := p.take(p.uvarint()), p.take(p.uvarint()), p.take(p.uvarint())
	if p.bad || len(p.rest) > 0 {
		return e, errRecord
	}
	return Event{
		At: keyTime(key), Until: int64(binary.LittleEndian.Uint64(value)), Number: binary.BigEndian.Uint64(key[8:]),
		Kind: string(kind), Subject: string(subject), Text: string(text),
	}, nil
}
