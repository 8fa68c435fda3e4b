package agent

import (
	"math"
	"os"
	"path/filepath"
	"time"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/agent/view"
	"heatreeve/ingest"
)

// publish shows readers the state after this beat.
func (a *Agent) publish(r *rhythm) {
	l := r.books
	s := l.accounts.engine.Snapshot()
	v := &view.Snapshot{
		Site:     a.site.Name,
		At:       s.Through,
		Slack:    int64(a.site.Timing.Lateness+2*a.site.Timing.Beat+2*a.site.Timing.Grid) + min(r.pace.lag.least(), int64(mostLag)),
		Lag:      r.pace.lag.least(),
		Loads:    make([]view.Load, len(s.Loads)),
		Tags:     make([]view.Tag, len(s.Tags)),
		Warnings: l.board,
		Broker:   brokerView(r.intakes[0]),
		History:  view.History{Bytes: l.store.Bytes(), FileBytes: a.fileBytes(), Failures: l.failures, Fault: l.fault, Damaged: l.store.Damaged(), Lost: l.lost, LostMinutes: l.lostMinutes},
	}
	if hasMetrics(a.site) {
		v.Sparkplug = sparkplugView(r.intakes)
	}
	if a.clock != nil {
		v.ClockSteps, _ = a.clock.state()
	}
	for i := range s.Loads {
		v.Loads[i] = a.loadView(l, i, s.Loads[i])
	}
	for i := range a.site.Exchangers {
		x := &a.site.Exchangers[i]
		v.Exchangers = append(v.Exchangers, view.Exchanger{Name: x.Name, Allowance: x.Fouling, Standing: l.accounts.verdicts.Exchanger(i)})
	}
	for _, f := range r.intakes[1:] {
		v.Brokers = append(v.Brokers, brokerView(f))
	}
	for _, f := range r.intakes {
		f.tellUnborn(a.o.Log)
		for k, i := range f.tags {
			v.Tags[i] = tagView(&a.site.Tags[i], s.Tags[i], f.stats.Tags[k])
		}
	}
	a.tellLate(r, v)
	a.latest.Store(v)
	if p := a.page.Load(); p != nil {
		p.Beat()
	}
	if a.o.Beat != nil {
		a.o.Beat(v)
	}
}

// sparkplugView adds up over the brokers.
func sparkplugView(intakes []*intake) *view.Sparkplug {
	v := new(view.Sparkplug)
	for _, f := range intakes {
		c := &f.stats.Sparkplug
		v.Births, v.Deaths, v.LateDeaths = v.Births+c.Births, v.Deaths+c.Deaths, v.LateDeaths+c.LateDeaths
		v.Unborn, v.Malformed, v.Retained = v.Unborn+c.Unborn, v.Malformed+c.Malformed, v.Retained+c.Retained
		v.Crowded, v.Gaps, v.Missed = v.Crowded+c.Crowded, v.Gaps+c.Gaps, v.Missed+c.Missed
		v.Reordered, v.UnknownAlias, v.Requests = v.Reordered+c.Reordered, v.UnknownAlias+c.UnknownAlias, v.Requests+c.Requests
	}
	return v
}

func brokerView(f *intake) view.Broker {
	s := &f.stats
	return view.Broker{
		Name: f.name, Connected: s.Connected, Topics: s.Subscribed, Losses: s.Losses, UnknownTopic: s.UnknownTopic, Fault: s.LastError, Waiting: f.session.Waiting(),
		Published: s.Outbox.Published, Unpublished: s.Outbox.Dropped,
	}
}

// tellLate tells of the first late reading of each tag.
func (a *Agent) tellLate(r *rhythm, v *view.Snapshot) {
	for i := range v.Tags {
		if v.Tags[i].Late > 0 && !r.late[i] {
			r.late[i] = true
			a.o.Log.Warn("a reading came after its time was accounted for; more are only counted. If they go on, set the publisher's clock or raise timing.lateness",
				"tag", v.Tags[i].Name, "event_time", time.Unix(0, v.At).UTC())
		}
	}
}

// fileBytes is the size of the history's file, 0 where it cannot be told.
func (a *Agent) fileBytes() int64 {
	info, err := os.Stat(filepath.Join(a.o.Data, HistoryFile))
	if err != nil {
		return 0
	}
	return info.Size()
}

func (a *Agent) loadView(l *ledger, i int, s loads.LoadState) view.Load {
	g := l.accounts.verdicts.Grounds(i)
	return view.Load{
		Name: a.site.Loads[i].Name, Figure: s.Figure, Until: s.Until, Means: s.Means, Booked: l.committed[i],
		Design: g.Today.Duty, DesignError: g.Today.Lasting, Allow: g.Target.Allow,
		Deviation: g.Deviation, DeviationError: g.Uncertainty(), Compared: g.Compared(),
		Witness: l.attested.at(i, l.accounts.engine.Through()),
		Verdict: l.accounts.verdicts.Verdict(i, !s.Figure.Measured(), s.Figure.Idle),
	}
}

// reasons are the names under which a tag's refused messages are counted.
var reasons = names(ingest.Reasons(), ingest.Reason.String)

// crowded is one more: good readings that the engine had no room for.
const crowded = "crowded"

func tagView(tag *site.Tag, t loads.TagState, s ingest.TagStats) view.Tag {
	v := view.Tag{Name: tag.Name, MaxAge: int64(tag.Holds()), Newest: max(t.Newest, s.NewestAt), Accepted: s.Accepted - t.Crowded, Late: t.Late, Repeated: t.Repeated}
	v.Counter, v.Resets, v.Leaps = tag.Counter != nil, t.Reset, t.Implausible
	for _, d := range t.Doubted {
		v.Doubted = append(v.Doubted, view.Doubt{Reason: d.Mark.String(), Count: d.Readings})
	}
	if v.Newest == 0 && !math.IsNaN(s.Retained) {
		v.Kept = tag.Show(s.Retained)
	}
	v.Refused = noRefusals
	if t.Crowded > 0 || s.Refused != (ingest.TagStats{}).Refused {
		v.Refused = refusals(&s, t.Crowded)
	}
	return v
}

// noRefusals are those of the tags that have none, which are most of them at each beat.
var noRefusals = refusals(new(ingest.TagStats), 0)

func refusals(s *ingest.TagStats, crowdedOut uint64) []view.Refusal {
	all := make([]view.Refusal, 0, len(reasons)+1)
	for i, reason := range reasons {
		all = append(all, view.Refusal{Reason: reason, Count: s.Refused[i]})
	}
	return append(all, view.Refusal{Reason: crowded, Count: crowdedOut})
}
