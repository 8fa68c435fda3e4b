package demo

import (
	"encoding/json"
	"fmt"
	"strconv"
	"strings"
	"time"

	"heatreeve/agent/site"
)

// garbage is what a transmitter sends that has lost its mind.
const garbage = "#ERR sensor 7?"

// checkPayload refuses what [payload] cannot write.
func checkPayload(tags []site.Tag) error {
	topics := make(map[string]string, len(tags))
	for _, t := range tags {
		if other, twice := topics[t.Topic]; twice {
			return fmt.Errorf("tags %q and %q share the topic %q; each transmitter of the invented plant has its own", other, t.Name, t.Topic)
		}
		topics[t.Topic] = t.Name
		if t.TimeFormat != "" && t.TimeFormat != "ms" {
			return fmt.Errorf("tag %q: the invented plant stamps in ms, not in %q", t.Name, t.TimeFormat)
		}
	}
	return nil
}

// payload is the message of a sample taken at the instant at: a bare number, or
// JSON with value and stamp where the tag's pointers look for them.
func payload(t *site.Tag, s Sample, at time.Time) []byte {
	number := strconv.FormatFloat(s.Value, 'f', s.Decimals, 64)
	switch {
	case s.Condition == Garbled:
		return []byte(garbage)
	case t.Value == "":
		return []byte(number)
	}
	document := make(map[string]any)
	place(document, t.Value, json.Number(number))
	if t.Time != "" {
		place(document, t.Time, at.UnixMilli())
	}
	text, err := json.Marshal(document)
	if err != nil {
		panic(err) // nothing but objects and numbers
	}
	return text
}

// place puts v where a JSON Pointer (RFC 6901) looks for it, among objects.
func place(document map[string]any, pointer string, v any) {
	names := strings.Split(pointer[1:], "/")
	for i, name := range names {
		names[i] = strings.ReplaceAll(strings.ReplaceAll(name, "~1", "/"), "~0", "~")
	}
	last := len(names) - 1
	for _, name := range names[:last] {
		inner, ok := document[name].(map[string]any)
		if !ok {
			inner = make(map[string]any)
			document[name] = inner
		}
		document = inner
	}
	document[names[last]] = v
}
