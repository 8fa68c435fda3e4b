package ingest

import (
	"fmt"
	"unicode/utf8"
)

// Refusal tells why a message gave a tag no reading, and what to do about it.
type Refusal struct {
	Tag     string // name
	Reason  Reason
	Payload string // the beginning of the payload
	Cut     bool   // Payload is not the whole
	At      int64  // arrival, Unix nanoseconds
	Detail  string // what was found and what to do, without tag and payload
}

// Error returns a line such as
//
//	tag "CHW-FT-7": payload "12,4" is not a number; the decimal separator must be a point
func (r *Refusal) Error() string {
	dots := ""
	if r.Cut {
		dots = "…"
	}
	return fmt.Sprintf("tag %q: payload %q%s %s", r.Tag, r.Payload, dots, r.Detail)
}

const shownPayload = 96 // bytes

// excerpt copies the beginning of a payload, cut between two characters.
func excerpt(payload []byte) (text string, cut bool) {
	if len(payload) <= shownPayload {
		return string(payload), false
	}
	end := shownPayload
	for end > shownPayload-utf8.UTFMax && !utf8.RuneStart(payload[end]) {
		end--
	}
	return string(payload[:end]), true
}

// fault is a refusal before it knows its tag and payload.
type fault struct {
	reason Reason
	detail string
}

func faultf(r Reason, format string, args ...any) *fault {
	return &fault{reason: r, detail: fmt.Sprintf(format, args...)}
}

// shortened quotes a part of a payload for a message.
func shortened(part []byte) string {
	text, cut := excerpt(part)
	if cut {
		return fmt.Sprintf("%q…", text)
	}
	return fmt.Sprintf("%q", text)
}
