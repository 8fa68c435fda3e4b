package agent

import (
	"context"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/view"
	"heatreeve/agent/working"
)

// deskWait is how long a page waits for its turn and its answer.
const deskWait = 15 * time.Second

// desk is where pages ask, each in its turn.
type desk struct {
	*health
	reports  *reports
	explains *explains
	turn     chan struct{} // holds one while a series or events are in the making
}

func newDesk(h *health, r *reports, x *explains) *desk {
	return &desk{health: h, reports: r, explains: x, turn: make(chan struct{}, 1)}
}

// Snapshot implements [page.Source].
func (d *desk) Snapshot() *view.Snapshot { return d.latest.Load() }

// Now implements [page.Source].
func (d *desk) Now() time.Time { return d.now() }

// Report implements [page.Source].
func (d *desk) Report(ctx context.Context, q answer.Query) (*answer.Report, error) {
	return inTurn(ctx, d.reports.turn.one, func(ctx context.Context) (*answer.Report, error) { return d.reports.history.report(ctx, q) })
}

// Explain implements [page.Source].
func (d *desk) Explain(ctx context.Context, q answer.Explanation) (*working.Working, error) {
	return inTurn(ctx, d.explains.turn.one, func(ctx context.Context) (*working.Working, error) { return d.explains.explain(ctx, q) })
}

// Events implements [page.Source].
func (d *desk) Events(ctx context.Context, q answer.EventQuery, tell func(*answer.Event)) (int, error) {
	return inTurn(ctx, d.turn, func(ctx context.Context) (int, error) { return d.reports.history.eachEvent(ctx, q, tell) })
}

// Series implements [page.Source].
func (d *desk) Series(ctx context.Context, q answer.SeriesQuery) (*answer.Series, error) {
	return inTurn(ctx, d.turn, func(ctx context.Context) (*answer.Series, error) { return d.reports.history.series(ctx, q) })
}

// inTurn asks once the turn has come.
func inTurn[T any](ctx context.Context, t chan struct{}, ask func(context.Context) (T, error)) (x T, err error) {
	ctx, cancel := context.WithTimeout(ctx, deskWait)
	defer cancel()
	select {
	case t <- struct{}{}:
		defer func() { <-t }()
		return ask(ctx)
	case <-ctx.Done():
		return x, ctx.Err()
	}
}
