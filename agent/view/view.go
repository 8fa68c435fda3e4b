// Package view holds the picture of the running agent that readers see: one
// immutable snapshot a beat. Metrics, page and terminal read it; nothing in it
// changes after it was published, so nobody locks.
package view

import (
	"fmt"
	"math"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/warn"
	"heatreeve/ingest/quality"
)

// Snapshot is the agent at one beat. Instants are Unix nanoseconds.
type Snapshot struct {
	Site  string
	At    int64 // event time: every interval that ends by then is accounted for
	Lag   int64 // how far the stamps have lately lagged behind the clock at least, ns
	Slack int64 // how long a reading may be on its way into a figure in good order, ns
	Loads []Load
	Tags  []Tag
	// Exchangers are those of the site, of which both streams are loads.
	Exchangers []Exchanger
	// ClockSteps counts how often this machine's clock was set while the agent ran.
	ClockSteps uint64
	Warnings   warn.Board
	Broker     Broker     // the main one
	Brokers    []Broker   // beside it
	Sparkplug  *Sparkplug // nil where no tag reads a metric
	History    History
}

// Load is one load.
type Load struct {
	Name    string
	Figure  loads.Figure
	Until   int64 // when the first input runs out of age; MaxInt64 for constants alone
	Means   [len(loads.Windows)]loads.Mean
	Booked  loads.Totals // as last committed to disk
	Design  float64      // duty expected in the last minute, W; 0 where it is not known, or the load has no design
	Allow   float64      // allowance, fraction of Design
	Verdict design.Verdict
	// DesignError is the standard uncertainty of Design by what lasts, W.
	DesignError float64
	// Deviation is the mean duty of the minutes that a deviation must last less what was expected,
	// with its standard uncertainty, W; only where they were Compared.
	Deviation, DeviationError float64
	Compared                  bool
	Witness                   *Witness // nil of a load without one
}

// Exchanger is what an exchanger did in its last window of minutes.
type Exchanger struct {
	Name      string
	Allowance float64 // of the fouling resistance, K/W; 0 for none
	design.Standing
}

// longestWindow is how long the last window of an exchanger may be shown: after that it is
// another time. Common practice, no source.
const longestWindow = int64(time.Hour)

// Told returns what exchanger i did, as it may be shown at event time; false where its last
// window is longer ago than an hour, or there has been none.
func (s *Snapshot) Told(i int) (*Exchanger, bool) {
	x := &s.Exchangers[i]
	return x, x.At > 0 && s.At-x.At <= longestWindow
}

// Reached tells in how many days the fouling resistance comes to its allowance, by its course,
// with an interval of about 95 %: late is +Inf where it might as well never. ok is false where
// there is no allowance, no course yet, or none that leads there.
func (x *Exchanger) Reached() (days, early, late float64, ok bool) {
	if x.Allowance == 0 {
		return 0, 0, 0, false
	}
	return x.Course.Reach(x.Allowance, x.FoulingError)
}

// Witness is what another meter has counted since midnight by the clock of the site, and what
// the load served in the same spans, J.
type Witness struct {
	Counted, Served float64
	Deviation       float64 // of the load from its witness, as a fraction of it
	Told            bool    // the witness has counted anything, so that there is a deviation
}

// Tag is one tag, with what became of its messages since the agent started.
type Tag struct {
	Name   string
	Newest int64 // stamp of the newest reading; 0 before the first
	// Kept is the value, with its unit, of a message without a stamp that the broker had kept,
	// before the first reading: of an age that nobody knows, and in no figure. "" for none.
	Kept     string
	MaxAge   int64 // how long a reading holds, ns; 0 for as long as its source is alive
	Accepted uint64
	Late     uint64    // arrived after their interval was accounted for
	Repeated uint64    // delivered more than once
	Refused  []Refusal // one entry a reason, all reasons, in a fixed order
	Doubted  []Doubt   // readings accepted that have a mark; one entry a reason that was met
	Counter  bool      // a register that only rises
	Resets   uint64    // falls of a counter that no roll-over explains
	Leaps    uint64    // rises of a counter by more than can have passed
}

// Refusal counts the messages of a tag that were refused for one reason.
type Refusal struct {
	Reason string
	Count  uint64
}

// Doubt counts the readings of a tag that have one mark: they are uncertain or bad, or good
// from a device that asks for maintenance.
type Doubt struct {
	Reason string
	Count  uint64
}

// Doubts lists the reasons of all marks that there are, in a fixed order.
func Doubts() []string {
	var all []string
	for _, m := range quality.Marks() {
		all = append(all, m.String())
	}
	return all
}

// AllBrokers are the main broker and those beside it.
func (s *Snapshot) AllBrokers() []Broker { return append([]Broker{s.Broker}, s.Brokers...) }

// Broker is the MQTT session with one.
type Broker struct {
	Name         string // "" of the main one
	Connected    bool
	Topics       int    // topics that the broker has granted on this connection
	Losses       uint64 // connections lost since the agent started
	UnknownTopic uint64 // messages on topics that no tag asks for
	Fault        string // why there is no connection; empty when there is
	Waiting      int    // messages not yet acknowledged
	Published    uint64 // messages published
	Unpublished  uint64 // messages to publish that were dropped
}

// Called is what a message calls the broker.
func (b *Broker) Called() string {
	if b.Name == "" {
		return "broker"
	}
	return fmt.Sprintf("broker %q", b.Name)
}

// Sparkplug counts what came by Sparkplug B since the agent started.
type Sparkplug struct {
	Births, Deaths uint64 // of nodes and devices
	LateDeaths     uint64 // of sessions that were over
	Unborn         uint64 // messages before a birth that holds
	Malformed      uint64 // messages that are no Sparkplug B
	Retained       uint64 // messages that the broker had kept, against the standard
	Crowded        uint64 // messages and metrics beyond the bounds
	Gaps, Missed   uint64 // in the sequences of nodes, and the messages missing in them
	Reordered      uint64 // messages of these that came later
	UnknownAlias   uint64 // metrics whose alias no birth has told
	Requests       uint64 // births asked for
}

// History is the store.
type History struct {
	Bytes     int64  // in use
	FileBytes int64  // of the file, free pages included
	Failures  uint64 // commits that failed since the agent started
	Fault     string // why the last commit failed; empty when it did not
	Lost      uint64 // readings given up because the disk took nothing for long
	Damaged   int64  // records that could not be read since the agent started, when something was to be made of them
	// LostMinutes are minute records given up likewise.
	LostMinutes uint64
}

// Current returns the load's figure as it may be shown at the instant now, and
// the verdict that goes with it. A figure whose inputs have run out of age since
// it was worked is blind: a frozen last value is never shown as live.
func (s *Snapshot) Current(i int, now int64) (loads.Figure, design.Verdict) {
	l := &s.Loads[i]
	if l.Figure.Measured() && s.out(l, now) {
		return loads.Figure{At: l.Figure.At, Fault: loads.Stale, Reason: s.why()}, design.Blind
	}
	return l.Figure, l.Verdict
}

// why says why a figure that was measured is not shown.
func (s *Snapshot) why() string {
	const none = "no reading has come in time to hold the figure"
	if lag := time.Duration(s.Lag); lag > time.Minute {
		return fmt.Sprintf("%s: stamps lag %v behind this machine's clock; check the publishers' clocks and time zones", none, lag.Round(time.Second))
	}
	return none
}

// out tells whether the load's inputs have run out of age.
func (s *Snapshot) out(l *Load, now int64) bool {
	return l.Until < math.MaxInt64-s.Slack && now > l.Until+s.Slack
}

// Mean returns the rolling mean k of load i as it may be shown at the instant now.
// Once the load's inputs have run out of age, the time since then that is not
// accounted for yet counts as not measured: the coverage falls though event time
// stands still, and is 0 when the window has passed.
func (s *Snapshot) Mean(i, k int, now int64) loads.Mean {
	l := &s.Loads[i]
	m := l.Means[k]
	if s.out(l, now) {
		since := max(0, now-max(l.Until, s.At)-s.Slack)
		m.Coverage *= max(0, 1-float64(since)/float64(loads.Windows[k]))
	}
	return m
}
