package agent

import (
	"context"
	"encoding/json"
	"heatreeve/agent/answer"
	"net/http"
	"time"
)

const (
	reportPath = "/report"
	// reportTime bounds how long one report may take.
	reportTime = 2 * time.Minute
	// reportStall is how long who asked for a report may take nothing of it.
	reportStall = 10 * time.Second
	// reportsAtATime bounds how many queries there are: one in the making or on its way,
	// and those that wait for their turn.
	reportsAtATime = 4
)

// reports answers queries while the agent runs, one at a time. It only reads, in
// short transactions: nothing waits for it but the next query. A report keeps its turn until
// it has been taken, so that there is never more than one in memory.
type reports struct {
	history history
	turn    chan struct{} // holds one while a report is in the making or on its way
	queue   chan struct{} // holds one a query
	stall   time.Duration
}

func newReports(h history) *reports {
	return &reports{history: h, turn: make(chan struct{}, 1), queue: make(chan struct{}, reportsAtATime), stall: reportStall}
}

func (s *reports) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	q, err := answer.QueryOf(r.URL.Query())
	if err != nil {
		refuse(w, err)
		return
	}
	select {
	case s.queue <- struct{}{}:
		defer func() { <-s.queue }()
	default:
		http.Error(w, "other reports are in the making; try again in a while", http.StatusServiceUnavailable)
		return
	}
	ctx, cancel := context.WithTimeout(r.Context(), reportTime)
	defer cancel()
	// Longer than other answers may take; where it cannot be set, there is no bound.
	control := http.NewResponseController(w)
	_ = control.SetWriteDeadline(time.Now().Add(reportTime + s.stall))
	select {
	case s.turn <- struct{}{}:
		defer func() { <-s.turn }()
	case <-ctx.Done():
		http.Error(w, "other reports took all the time; try again in a while", http.StatusServiceUnavailable)
		return
	}
	report, err := s.history.report(ctx, q)
	if err != nil {
		refuse(w, err)
		return
	}
	w.Header().Set("Content-Type", "application/json")
	e := json.NewEncoder(&steady{ResponseWriter: w, control: control, stall: s.stall, end: time.Now().Add(reportTime)})
	e.SetEscapeHTML(false)
	_ = e.Encode(report) // who asked has gone
	_ = control.Flush()  // what is kept back is to be taken within the turn too
}
