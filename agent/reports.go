package agent

import (
	"context"
	"crypto/rand"
	"encoding/json"
	"net/http"
	"time"
)

const (
	reportPath = "/report"
	// runHeader names the run of the agent that answers.
	runHeader = "Heatreeve-Run"
	// reportTime bounds how long one report may take.
	reportTime = 2 * time.Minute
)

// reports answers queries while the agent runs, one at a time. It only reads, in
// short transactions: nothing waits for it but the next query.
type reports struct {
	history history
	run     string        // names this run of the agent
	turn    chan struct{} // holds one while a report is in the making
}

func newReports(h history) *reports {
	return &reports{history: h, run: rand.Text(), turn: make(chan struct{}, 1)}
}

func (s *reports) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	w.Header().Set(runHeader, s.run)
	q, err := queryOf(r.URL.Query())
	if err != nil {
		refuse(w, err)
		return
	}
	ctx, cancel := context.WithTimeout(r.Context(), reportTime)
	defer cancel()
	// Longer than other answers may take; where it cannot be set, there is no bound.
	_ = http.NewResponseController(w).SetWriteDeadline(time.Now().Add(reportTime + 20*time.Second))
	report, err := s.answer(ctx, q)
	if err != nil {
		refuse(w, err)
		return
	}
	w.Header().Set("Content-Type", "application/json")
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	_ = e.Encode(report) // who asked has gone
}

// answer makes the report when it is its turn.
func (s *reports) answer(ctx context.Context, q Query) (*Report, error) {
	select {
	case s.turn <- struct{}{}:
		defer func() { <-s.turn }()
		return s.history.report(ctx, q)
	case <-ctx.Done():
		return nil, ctx.Err()
	}
}
