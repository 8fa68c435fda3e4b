package agent

import (
	"fmt"
	"math"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
)

// mostEvents bounds the events of a report.
const mostEvents = 1000

// addEvents puts the events into the report that have a part in its time. One that goes as
// far as the history has those since then as well: a stop comes after the last reading.
func (h *history) addEvents(r *answer.Report, plan account.Plan) {
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
