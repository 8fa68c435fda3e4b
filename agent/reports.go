package agent

import (
	"context"
	"heatreeve/agent/answer"
	"net/http"
	"time"
)

const (
	reportPath = answer.Path + "report"
	// reportTime bounds how long one report may take.
	reportTime = 2 * time.Minute
	// reportStall is how long who asked for a report may take nothing of it.
	reportStall = 10 * time.Second
)

// reports answers queries while the agent runs, one at a time. It only reads, in
// short transactions: nothing waits for it but the next query. A report keeps its turn until
// it has been taken, so that there is never more than one in memory.
type reports struct {
	history history
	turn    turn // holds one while a report is in the making or on its way
	stall   time.Duration
}

func newReports(h history) *reports {
	return &reports{history: h, turn: newTurn(atATime, "other reports are in the making; try again in a while"), stall: reportStall}
}

func (s *reports) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	q, err := answer.QueryOf(r.URL.Query())
	if err != nil {
		refuse(w, err)
		return
	}
	ctx, cancel := context.WithTimeout(r.Context(), reportTime)
	defer cancel()
	allow(w, reportTime+s.stall)
	if !s.turn.taken(ctx, w) {
		return
	}
	defer s.turn.free()
	report, err := s.history.report(ctx, q)
	if err != nil {
		refuse(w, err)
		return
	}
	hand(w, r, report, s.stall)
}
