package ingest

import (
	"fmt"
	"strings"
	"unicode"
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
	if !isText(r.Payload) {
		head := r.Payload[:min(len(r.Payload), shownBytes)]
		if len(head) < len(r.Payload) {
			dots = "…"
		}
		return fmt.Sprintf("tag %q: binary payload % x%s %s", r.Tag, head, dots, r.Detail)
	}
	return fmt.Sprintf("tag %q: payload %q%s %s", r.Tag, r.Payload, dots, r.Detail)
}

// isText reports whether people can read a payload, such as not one of Sparkplug B.
func isText(payload string) bool {
	return utf8.ValidString(payload) && !strings.ContainsFunc(payload, func(r rune) bool {
		return unicode.IsControl(r) && !unicode.IsSpace(r)
	})
}

const shownBytes = 12 // of a payload that is no text

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
