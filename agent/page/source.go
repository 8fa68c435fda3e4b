package page

import (
	"context"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/site"
	"heatreeve/agent/view"
	"heatreeve/agent/working"
)

// Source is what the page shows. Its methods may be called at once by many. What is wrong with
// a query is an [*answer.QueryError]; where there is no record, the error is [answer.ErrNoRecord].
type Source interface {
	// Snapshot is the agent at its last beat, nil before the first.
	Snapshot() *view.Snapshot
	// Now is the clock by which figures run out of age.
	Now() time.Time
	Report(context.Context, answer.Query) (*answer.Report, error)
	Explain(context.Context, answer.Explanation) (*working.Working, error)
	// Events hands over what happened, one by one and by time, and counts the records that
	// cannot be read.
	Events(context.Context, answer.EventQuery, func(*answer.Event)) (unused int, err error)
	Series(context.Context, answer.SeriesQuery) (*answer.Series, error)
}

// Options are what the page needs besides its source.
type Options struct {
	Site    *site.Site
	Version string
	Safety  string // what every page says of itself
	// Ended ends the event streams, which would hold up the end of the agent.
	Ended <-chan struct{}
}
