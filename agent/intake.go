package agent

import (
	"errors"
	"log/slog"
	"time"

	"heatreeve/agent/site"
	"heatreeve/ingest"
)

// intake is one broker: the session with it, and what the beat knows of it. Each has its
// own window and its own acknowledgements; a commit of the history serves all.
type intake struct {
	name    string // "" of the main broker
	queue   int    // messages that the broker keeps
	session *ingest.Session
	tags    []int // of the site, in the session's order

	received []ingest.Received // taken in this beat
	unacked  []ingest.Received // taken and not yet on disk
	stats    ingest.Stats
	window   window
	told     bool // that the broker waits
	rebirths bool // nodes may be asked for their births
	unborn   bool // what waits for a birth has been told
	hold     hold // while the disk takes nothing
	rate     rate // of messages, while it does
}

// newIntakes prepares the sessions with the site's brokers; all tell reached when one of
// them has sent as much as it sends without an acknowledgement.
func newIntakes(s *site.Site, o Options, reached chan struct{}) ([]*intake, error) {
	var intakes []*intake
	var faults []error
	signals := signalsOf(s)
	for i, b := range s.AllBrokers() {
		f := &intake{name: b.Name, queue: b.Queue, rebirths: b.Rebirths}
		var on []ingest.Tag
		f.tags, on = onBroker(s, signals, i)
		var err error
		f.session, err = newSession(s, b, on, o, reached)
		intakes, faults = append(intakes, f), append(faults, err)
	}
	return intakes, errors.Join(faults...)
}

// onBroker are the tags of the site that are on one of its brokers, and their signals.
func onBroker(s *site.Site, signals []ingest.Tag, broker int) (tags []int, on []ingest.Tag) {
	for k := range s.Tags {
		if s.Tags[k].Broker == broker {
			tags, on = append(tags, k), append(on, signals[k])
		}
	}
	return tags, on
}

// look takes in how the broker stands to its limit of messages in flight, and reports
// whether to commit for its sake.
func (f *intake) look(log *slog.Logger) bool {
	commit := f.window.look(f.session.Waiting())
	f.session.TellAt(f.window.limit)
	if f.window.proven && !f.told {
		f.told = true
		log.Info("the broker seems to wait for acknowledgements; the history is written more often than timing.commit while it does. To spare the disk, raise the broker's limit of messages in flight", f.label("messages", f.window.limit)...)
	}
	return commit
}

// tellUnborn tells once of metrics that come by aliases alone, which nobody has told: where
// the site does not let the agent ask, they may wait for days.
func (f *intake) tellUnborn(log *slog.Logger) {
	if f.unborn || f.stats.Sparkplug.UnknownAlias == 0 {
		return
	}
	f.unborn = true
	what := "let it ask with commands: rebirth of the broker, or have the node send its births again"
	if f.rebirths {
		what = "births are asked for"
	}
	log.Warn("Sparkplug metrics come by aliases of a birth that the agent has not heard, and their tags wait for the next one: "+what, f.label()...)
}

// label names the broker behind other fields of a log line, where there are several.
func (f *intake) label(args ...any) []any {
	if f.name != "" {
		args = append(args, "broker", f.name)
	}
	return args
}

// take takes what came.
func (f *intake) take() {
	before := f.stats.Connections
	f.stats = f.session.Stats()
	if f.stats.Connections != before {
		f.window.connected()
	}
}

// standing tells event time how it is with the broker; faulty is a disk that takes nothing.
func (f *intake) standing(faulty bool) standing {
	heldBack := f.session.Waiting() >= leastWindow && (f.window.eager || faulty)
	return standing{connected: f.stats.Connected, heldBack: heldBack}
}

// acknowledge acknowledges what was taken.
func (f *intake) acknowledge() {
	f.session.Ack(f.unacked)
	f.unacked = emptied(f.unacked)
}

// committed acknowledges what is on disk now.
func (f *intake) committed(system time.Time) {
	f.hold = hold{}
	waiting := f.session.Waiting()
	f.acknowledge()
	f.rate.note(max(0, waiting-f.session.Waiting()), system)
	f.window.committed(waiting)
}

// brokerOf tells of each tag which broker it is on.
func brokerOf(s *site.Site) []int {
	of := make([]int, len(s.Tags))
	for i := range s.Tags {
		of[i] = s.Tags[i].Broker
	}
	return of
}

// grace is how long event time waits for a broker that is away: well below what every
// reading of the others holds, or their loads would be blind meanwhile.
func grace(s *site.Site) time.Duration {
	d := graceAway
	for i := range s.Tags {
		d = min(d, s.Tags[i].MaxAge/2)
	}
	return d
}
