package sparkplug

import (
	"encoding/json"
	"errors"
	"fmt"
	"strings"
	"unicode/utf8"
)

// State is what a host application tells of itself, with QoS 1 and retained: Sparkplug
// 3.0, chapter 6, and as its will with Online false.
type State struct {
	Online    bool  `json:"online"`
	Timestamp int64 `json:"timestamp"` // ms since 1970 UTC; of a will, and of what follows it, when the host connected
}

// StateTopic is the topic of a host's state.
func StateTopic(host string) string { return Prefix + "STATE/" + host }

// CheckHost tells what is wrong with the id of a host.
func CheckHost(id string) error {
	switch {
	case id == "":
		return errors.New("the host id is empty")
	case strings.ContainsAny(id, "+#/"):
		return fmt.Errorf("host id %q has one of + # /", id)
	case !utf8.ValidString(id) || strings.ContainsRune(id, 0):
		return fmt.Errorf("host id %q is not UTF-8 without NUL", id)
	}
	return nil
}

// Payload is the state as it is published.
func (s State) Payload() []byte {
	return fmt.Appendf(nil, `{"online":%t,"timestamp":%d}`, s.Online, s.Timestamp)
}

// ParseState reads a state.
func ParseState(payload []byte) (State, error) {
	var s struct {
		Online    *bool  `json:"online"`
		Timestamp *int64 `json:"timestamp"`
	}
	if err := json.Unmarshal(payload, &s); err != nil {
		return State{}, fmt.Errorf("state of a host: %w", err)
	}
	if s.Online == nil || s.Timestamp == nil {
		return State{}, errors.New("state of a host: online and timestamp are not both there")
	}
	return State{*s.Online, *s.Timestamp}, nil
}
