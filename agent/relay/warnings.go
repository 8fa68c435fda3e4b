package relay

import (
	"bytes"
	"encoding/json"
	"fmt"
	"time"

	"heatreeve/agent/view"
	"heatreeve/agent/warn"
)

// warned is what was told of a warning last.
type warned struct {
	at      time.Time // by the system's clock
	state   warn.State
	payload []byte
}

// Warnings returns what is to be told of the warnings in s: at once where one has begun, is
// over or was acknowledged, and otherwise, as for the last time, as Look does. What is over is
// told as such and stays retained until the next warning of the same subject and kind, so that
// a consumer who was away meets the end.
func (r *Relay) Warnings(s *view.Snapshot, system time.Time, last bool) (out []Result, err error) {
	for i := range s.Warnings.All {
		l := &s.Warnings.All[i]
		topic := r.warnings + Level(l.Subject) + "/" + Level(string(l.Kind))
		was, state := r.warned[topic], l.State()
		if was.state == state && !last && system.Sub(was.at) < r.every {
			continue
		}
		payload, err := json.Marshal(l.Document(r.site, time.UTC))
		if err != nil {
			return out, fmt.Errorf("warning %s of %q: %w", l.Kind, l.Subject, err)
		}
		if bytes.Equal(payload, was.payload) {
			continue
		}
		r.warned[topic] = warned{system, state, payload}
		out = append(out, Result{topic, payload})
	}
	return out, nil
}
