// Package relay makes of snapshots what the agent publishes: one JSON document a load,
// which configs/result.schema.json describes, and one a warning, which
// configs/warning.schema.json does.
//
// A document is told when it differs from the one before in more than its time, not more
// often than it is allowed to, and never one whose event time is older than what was told.
// Every joule in it is on disk.
package relay

import (
	"encoding/json"
	"fmt"
	"strings"
	"time"

	"heatreeve/agent/view"
)

// Result is a document on its way to a topic, to be retained there.
type Result struct {
	Topic   string
	Payload []byte
}

// Relay remembers what was told last. It serves one goroutine at a time.
type Relay struct {
	site   string
	topics []string
	// warnings is what the topics of warnings begin with.
	warnings string
	every    time.Duration
	told     []told
	warned   map[string]warned // by topic
}

type told struct {
	at   time.Time // by the system's clock; zero: nothing yet
	time int64     // of the event
	document
}

// New returns a relay of the loads of a site, in the order of its snapshots. Topics begin
// with prefix; a load is told at most once in the time every.
func New(site, prefix string, loads []string, every time.Duration) *Relay {
	r := &Relay{site: site, every: every, told: make([]told, len(loads)), warned: make(map[string]warned)}
	r.warnings = prefix + "/warnings/"
	for _, name := range loads {
		r.topics = append(r.topics, prefix+"/"+Level(name))
	}
	return r
}

// Level is a load's name as a level of a topic: what means something in topics there (MQTT
// 3.1.1, section 4.7), and the percent sign, is written as %2F and so on (RFC 3986, section
// 2.1).
func Level(name string) string {
	return strings.NewReplacer("%", "%25", "/", "%2F", "+", "%2B", "#", "%23", "$", "%24").Replace(name)
}

// Look returns what is to be told of s. Now is the instant at which a figure may have run
// out of age, Unix nanoseconds; system the clock that bounds how often; last says that
// nothing comes after this, so that what has changed is told at once.
func (r *Relay) Look(s *view.Snapshot, now int64, system time.Time, last bool) ([]Result, error) {
	var out []Result
	for i := range s.Loads {
		t := &r.told[i]
		if s.Loads[i].Figure.At == 0 || s.At < t.time || !last && !t.at.IsZero() && system.Sub(t.at) < r.every {
			continue
		}
		d := r.document(s, i, now)
		if !t.at.IsZero() && d.same(&t.document) {
			continue
		}
		payload, err := json.Marshal(&d)
		if err != nil {
			return out, fmt.Errorf("result of load %q: %w", s.Loads[i].Name, err)
		}
		*t = told{at: system, time: s.At, document: d}
		out = append(out, Result{r.topics[i], payload})
	}
	return out, nil
}
