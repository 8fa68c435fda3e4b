package agent

import (
	"fmt"
	"math"
	"time"

	"heatreeve/agent/account"
)

// mostEvents bounds the events of a report.
const mostEvents = 1000

// Event is what happened beside the accounts, such as a start of the agent.
type Event struct {
	At time.Time `json:"at"`
	// Until is At where it took no time, and null while it lasts.
	Until   *time.Time `json:"until"`
	Kind    string     `json:"kind"`
	Subject string     `json:"subject"` // name of a tag or load; may be empty
	Text    string     `json:"text"`
}

// addEvents puts the events into the report that have a part in its time. One that goes as
// far as the history has those since then as well: a stop comes after the last reading.
func (h *history) addEvents(r *Report, plan account.Plan) {
	to := plan.To
	if to >= plan.Accounted() {
		to = math.MaxInt64
	}
	more, unused := 0, 0
	var fault error
	for e, err := range h.db.Events(plan.From, to) {
		if err != nil {
			if unused++; fault == nil {
				fault = err
			}
			continue
		}
		if len(r.Events) == mostEvents {
			more++
			continue
		}
		r.Events = append(r.Events, toldEvent(&e, plan.Zone))
	}
	if more > 0 {
		r.Notes = append(r.Notes, fmt.Sprintf("of what happened the first %d events are told, and not %d more; ask for a shorter time", mostEvents, more))
	}
	if unused > 0 {
		r.Unused += unused
		r.Notes = append(r.Notes, fmt.Sprintf("%d records of what happened cannot be used; the first: %v", unused, fault))
	}
}
