package agent

import (
	"cmp"
	"context"
	"net/http"
	"slices"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
)

// loadsPath is where the present figures are.
const loadsPath = answer.Path + "loads"

// newPresent tells the present figures by pages.
func newPresent(h *health, place *time.Location) http.Handler {
	return &queries[answer.LoadsQuery, answer.Loads]{
		turn: newTurn(atATime, "other figures are on their way; try again in a while"),
		read: answer.LoadsQueryOf,
		answer: func(_ context.Context, q answer.LoadsQuery) (*answer.Loads, error) {
			s := h.latest.Load()
			if s == nil {
				return nil, errNoBeat
			}
			return presentOf(s, h.now().UnixNano(), place, q)
		},
	}
}

// presentOf is a page of the present figures at the instant now.
func presentOf(s *view.Snapshot, now int64, place *time.Location, q answer.LoadsQuery) (*answer.Loads, error) {
	first := 0
	if q.After != "" {
		i := slices.IndexFunc(s.Loads, func(l view.Load) bool { return l.Name == q.After })
		if i < 0 {
			return nil, answer.Wrongf("after %q is no load; take it from next of the page before", q.After)
		}
		first = i + 1
	}
	end := min(len(s.Loads), first+cmp.Or(q.Limit, answer.UsualPage))
	out := &answer.Loads{Site: s.Site, At: time.Unix(0, s.At).In(place), Factor: answer.CoverageFactor, Loads: []answer.Present{}}
	for i := first; i < end; i++ {
		out.Loads = append(out.Loads, presentLoad(s, i, now, place))
	}
	if end < len(s.Loads) {
		q.After = s.Loads[end-1].Name
		out.Next = loadsPath + "?" + q.Values().Encode()
	}
	return out, nil
}

func presentLoad(s *view.Snapshot, i int, now int64, place *time.Location) answer.Present {
	l := &s.Loads[i]
	f, verdict := s.Current(i, now)
	p := answer.Present{Load: l.Name, Verdict: verdict.String(), Quality: f.Quality().String(), Remark: f.Beside(), Register: totalsOf(l.Booked)}
	if f.At != 0 {
		at := time.Unix(0, f.At).In(place)
		p.At = &at
	}
	if f.Measured() {
		p.Duty, p.Expanded = new(f.Duty), new(answer.CoverageFactor*f.Uncertainty)
	}
	if l.Design != 0 {
		p.Expected, p.ExpectedU, p.Allowance = new(l.Design), new(l.DesignError), new(l.Allow*max(l.Design, -l.Design))
	}
	if l.Compared {
		p.Deviation, p.DeviationU = new(l.Deviation), new(l.DeviationError)
	}
	for k, window := range loads.Windows {
		m := s.Mean(i, k, now)
		mean := answer.Mean{Window: seconds(int64(window)), Coverage: m.Coverage}
		if m.Coverage > 0 {
			mean.Duty = new(m.Duty)
		}
		p.Means = append(p.Means, mean)
	}
	return p
}

func totalsOf(t loads.Totals) answer.Register {
	return answer.Register{
		Given: t.Given, Taken: t.Taken, BridgedGiven: t.BridgedGiven, BridgedTaken: t.BridgedTaken,
		Measured: seconds(t.Measured), Bridged: seconds(t.Bridged), Missing: seconds(t.Missing), Uncertain: seconds(t.Uncertain),
	}
}
