package agent

import (
	"fmt"
	"log/slog"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/view"
)

// tellEvery is the least time between two log lines about one load, so that a
// flickering signal does not fill the log.
const tellEvery = time.Minute

// watch tells the log when a load leaves its design, goes blind, or is well again.
type watch struct {
	log  *slog.Logger
	told []told
}

// told is what the log last heard of a load.
type told struct {
	verdict design.Verdict
	reason  string
	at      time.Time
}

func newWatch(log *slog.Logger, loads int) *watch {
	return &watch{log: log, told: make([]told, loads)}
}

// look tells what has changed since it was last told, of loads that have been
// computed at least once.
func (w *watch) look(s *view.Snapshot, now time.Time) {
	for i := range s.Loads {
		figure, verdict := s.Current(i, now.UnixNano())
		t := &w.told[i]
		if !notable(t.verdict) && !notable(verdict) || verdict == t.verdict && figure.Reason == t.reason {
			continue
		}
		if s.Loads[i].Figure.At == 0 || now.Sub(t.at) < tellEvery {
			continue
		}
		*t = told{verdict, figure.Reason, now}
		w.tell(&s.Loads[i], figure.Duty, verdict, figure.Reason)
	}
}

// notable verdicts are told of when they come and when they go.
func notable(v design.Verdict) bool {
	return v == design.Short || v == design.Over || v == design.Blind
}

func (w *watch) tell(l *view.Load, duty float64, v design.Verdict, reason string) {
	args := []any{"load", l.Name, "verdict", v.String()}
	switch v {
	case design.Blind:
		w.log.Warn("load is blind", append(args, "reason", reason)...)
	case design.Short, design.Over:
		w.log.Warn("duty has left its design", append(args, "duty", kilowatts(duty), "design", kilowatts(l.Design), "allow", fmt.Sprintf("%g %%", 100*l.Allow))...)
	default:
		w.log.Info("load is well again", append(args, "duty", kilowatts(duty))...)
	}
}

func kilowatts(w float64) string { return fmt.Sprintf("%.1f kW", w/1e3) }
