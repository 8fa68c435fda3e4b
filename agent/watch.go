package agent

import (
	"fmt"
	"log/slog"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
)

// tellEvery is the least time between two log lines about one load, so that a
// flickering signal does not fill the log.
const tellEvery = time.Minute

// watch tells the log when a load goes blind, or is well again, and once of each load whose
// duty has a remark. Warnings have lines of their own.
type watch struct {
	log  *slog.Logger
	told []told
}

// told is what the log last heard of a load.
type told struct {
	verdict design.Verdict
	reason  string
	at      time.Time
	remark  bool
}

func newWatch(log *slog.Logger, loads int) *watch {
	return &watch{log: log, told: make([]told, loads)}
}

// look tells what has changed since it was last told, of loads that have been
// computed at least once.
func (w *watch) look(s *view.Snapshot, now time.Time) {
	for i := range s.Loads {
		figure, verdict := s.Current(i, now.UnixNano())
		if s.Loads[i].Figure.At == 0 {
			continue
		}
		t := &w.told[i]
		if figure.Note != "" && !t.remark {
			t.remark = true
			w.log.Info("duty with a remark; from now on only the page at / and the metrics tell of it", "load", s.Loads[i].Name, "duty", kilowatts(figure.Duty), "note", figure.Note)
		}
		if !notable(t.verdict) && !notable(verdict) || verdict == t.verdict && figure.Reason == t.reason || now.Sub(t.at) < tellEvery {
			continue
		}
		t.verdict, t.reason, t.at = verdict, figure.Reason, now
		w.tell(&s.Loads[i], &figure, verdict)
	}
}

// notable verdicts are told of when they come and when they go.
func notable(v design.Verdict) bool { return v == design.Blind }

func (w *watch) tell(l *view.Load, f *loads.Figure, v design.Verdict) {
	args := []any{"load", l.Name, "verdict", v.String()}
	if f.Note != "" {
		args = append(args, "note", f.Note)
	}
	switch v {
	case design.Blind:
		w.log.Warn("load is blind", append(args, "reason", f.Reason)...)
	default:
		w.log.Info("load is well again", append(args, "duty", kilowatts(f.Duty))...)
	}
}

func kilowatts(w float64) string { return fmt.Sprintf("%.1f kW", w/1e3) }
