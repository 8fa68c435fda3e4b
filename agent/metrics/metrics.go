// Package metrics exposes the agent's latest snapshot to Prometheus: one
// collector, no lock, and no more work than a scrape's text takes. Base units throughout: watts, joules,
// seconds, degrees Celsius, and kilograms per second, which the trade uses and
// the naming rules do not know.
package metrics

import (
	"errors"
	"math"
	"slices"
	"strings"

	"github.com/prometheus/client_golang/prometheus"
	dto "github.com/prometheus/client_model/go"

	"heatreeve/agent/design"
	"heatreeve/agent/figure"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
	"heatreeve/agent/warn"
	"heatreeve/ingest/quality"
)

// windowNames are the label values of [loads.Windows].
var windowNames = [len(loads.Windows)]string{"1m", "15m", "1h"}

var (
	duty        = desc("load_duty_watts", figure.Duty.Help(" at the last beat, positive in the load's own service; absent while the load is blind"), "load")
	uncertainty = desc("load_duty_uncertainty_watts", figure.Uncertainty.Help(" (coverage factor 1)"), "load")
	random      = desc("load_duty_random_uncertainty_watts", "Part of the standard uncertainty of the duty that changes from reading to reading, and averages out.", "load")
	dutyMean    = desc("load_duty_mean_watts", "Rolling mean of the duty over the measured part of the window.", "load", "window")
	coverage    = desc("load_coverage_ratio", "Part of the window that was measured, 0 to 1.", "load", "window")
	heat        = desc("load_heat_joules_total", "Heat that the stream gave up (given) or took up (taken), as last committed to disk; survives restarts.", "load", "direction")
	bridgedHeat = desc("load_bridged_heat_joules_total", "Heat by a straight line over short times without data, as last committed to disk; in no other register, and survives restarts.", "load", "direction")
	spent       = desc("load_time_seconds_total", "Time accounted for, by kind, as last committed to disk; survives restarts.", "load", "kind")
	doubtful    = desc("load_uncertain_seconds_total", "Part of the measured time for which an uncertain reading was used, as last committed to disk; survives restarts.", "load")
	grade       = desc("load_quality", "1 for the quality of the figure, the worst of the readings that it was computed from, 0 for the others; bad while the load is blind.", "load", "quality")
	latent      = desc("load_latent", "1 while the duty is the sensible part only, because vapour condenses in the load or may; otherwise 0, and absent while the load is blind.", "load")
	massFlow    = desc("load_mass_flow_kilograms_per_second", figure.MassFlow.Help(" that the duty was computed from"), "load")
	inlet       = desc("load_inlet_celsius", figure.Inlet.Help(" that the duty was computed from")+" With a hold it is "+figure.Leaving.Symbol+".", "load")
	outlet      = desc("load_outlet_celsius", figure.Outlet.Help(" that the duty was computed from"), "load")
	content     = desc("load_content_celsius", figure.Content.Help(" of a vessel, that the duty was computed from"), "load")
	counted     = desc("load_witness_counted_joules", "Heat that the load's witness has counted since midnight by the clock of the site, in spans between two of its counts that were measured throughout.", "load")
	served      = desc("load_witness_served_joules", "Heat that the load has served in the same spans as its witness has counted since midnight, positive in the load's own service.", "load")
	deviation   = desc("load_witness_deviation_ratio", "How far the load is above its witness since midnight, as a fraction of what that has counted; absent until it has counted anything.", "load")
	expected    = desc("load_expected_duty_watts", figure.Expected.Help(", what the design says of the conditions of the last minute"), "load")
	expectedU   = desc("load_expected_duty_uncertainty_watts", figure.ExpectedUncertainty.Help(""), "load")
	off         = desc("load_deviation_watts", figure.Deviation.Help(": mean duty less what was expected of it, over the last minutes that a deviation must last"), "load")
	offU        = desc("load_deviation_uncertainty_watts", figure.DeviationUncertainty.Help(""), "load")
	verdict     = desc("load_verdict", "1 for the verdict that stands, 0 for the others.", "load", "verdict")

	warnActive = desc("warning_active", "1 while the warning stands, 0 otherwise; of each kind that there can be on the subject.", "subject", "kind")
	warnMarked = desc("warning_acknowledged", "1 while the warning stands and is acknowledged.", "subject", "kind")
	warnShelf  = desc("warning_shelved", "1 while warnings of the kind are shelved, whether or not one stands.", "subject", "kind")

	reading  = desc("tag_reading_timestamp_seconds", "Unix time of the newest accepted reading.", "tag")
	maxAge   = desc("tag_max_age_seconds", "How long a reading holds; left out where it does as long as its source is alive.", "tag")
	readings = desc("tag_readings_total", "Readings accepted since the agent started.", "tag")
	refused  = desc("tag_refused_total", "Messages refused since the agent started, by tag and reason; reasons that a tag has not met are left out.", "tag", "reason")
	refusals = desc("refused_total", "Messages refused since the agent started, by reason, over all tags.", "reason")
	doubted  = desc("tag_doubted_total", "Readings that are uncertain or bad, or good from a device that asks for maintenance, since the agent started, by tag and reason; reasons that a tag has not met are left out.", "tag", "reason")
	doubts   = desc("doubted_total", "The same by reason, over all tags.", "reason")
	late     = desc("tag_late_readings_total", "Readings that came after their time was accounted for: kept, but in no figure.", "tag")
	unclear  = desc("tag_unclear_counts_total", "Counts of a counter after which it is not known what passed: it fell (reset), or rose by more than can be (implausible).", "tag", "kind")
	repeated = desc("tag_repeated_readings_total", "Readings delivered more than once and counted once.", "tag")

	eventTime = desc("event_timestamp_seconds", "Unix time up to which everything is accounted for.")
	connected = desc("broker_connected", "1 while the session with the broker is open.", "broker")
	topics    = desc("broker_subscribed_topics", "Topics that the broker has granted on this connection.", "broker")
	losses    = desc("broker_losses_total", "Connections to the broker lost since the agent started.", "broker")
	unknown   = desc("broker_unknown_topic_total", "Messages on topics that no tag asks for.", "broker")
	plugged   = desc("sparkplug_messages_total", "Messages of Sparkplug B since the agent started that are no data of a source that is born, by kind.", "kind")
	gaps      = desc("sparkplug_gaps_total", "Gaps in the sequences of Sparkplug nodes.")
	missed    = desc("sparkplug_missed_messages_total", "Messages missing in the sequences of Sparkplug nodes; some may have come later.")
	reordered = desc("sparkplug_reordered_messages_total", "Sparkplug messages that were missing and came later.")
	noAlias   = desc("sparkplug_unknown_alias_total", "Sparkplug metrics whose alias no birth has told.")
	requests  = desc("sparkplug_rebirth_requests_total", "Births that Sparkplug nodes were asked for.")
	steps     = desc("clock_steps_total", "How often this machine's clock was set since the agent started, by half a second or more.")
	waiting   = desc("broker_unacknowledged_messages", "Messages received and not yet acknowledged, because not yet on disk.", "broker")
	published = desc("broker_published_total", "Messages that the agent has published since it started.", "broker")
	unsent    = desc("broker_unpublished_total", "Messages that the agent was to publish and dropped since it started: without room, or without a connection that they were for.", "broker")
	bytes     = desc("history_bytes", "Bytes in use within the history's file; retention bounds them.")
	fileBytes = desc("history_file_bytes", "Size of the history's file, free pages included.")
	lost      = desc("history_lost_readings_total", "Readings given up because the disk took nothing for long; the registers have them.")
	lostMins  = desc("history_lost_records_total", "Minute records given up because the disk took nothing for long; the registers have them.")
	damaged   = desc("history_damaged_records_total", "Records of the history that could not be read since the agent started, when something was to be made of them; the log tells which.")
	writable  = desc("history_writable", "1 while the history takes what is written, 0 since a commit has failed.")
	failures  = desc("history_commit_failures_total", "Commits of the history that failed since the agent started.")
)

// Collector exposes what latest returns; before the first snapshot, nothing.
type Collector struct {
	latest func() *view.Snapshot
	now    func() int64
}

// NewCollector returns a collector over the snapshots that latest gives (nil
// before the first). Now, in Unix nanoseconds, tells when a figure has run out of
// age.
func NewCollector(latest func() *view.Snapshot, now func() int64) *Collector {
	return &Collector{latest: latest, now: now}
}

// Describe sends every description.
func (c *Collector) Describe(ch chan<- *prometheus.Desc) {
	for _, f := range families {
		ch <- f.Desc
	}
}

// Gather returns the series of the latest snapshot, by metric, in the order of the site. It
// does not look for clashes as a registry does at each scrape: names of metrics are constants
// and held apart by a test, those of loads and tags by the site file.
func (c *Collector) Gather() ([]*dto.MetricFamily, error) {
	s := c.latest()
	if s == nil {
		return nil, nil
	}
	out := newSink()
	now := c.now()
	for i := range s.Loads {
		figure, v := s.Current(i, now)
		out.figure(s.Loads[i].Name, &figure)
		out.quality(s.Loads[i].Name, &figure)
		out.load(&s.Loads[i], v)
		out.means(s, i, now)
	}
	out.exchangers(s)
	out.warnings(s.Warnings.Watched)
	for i := range s.Tags {
		out.tag(&s.Tags[i])
	}
	out.refusals(s.Tags)
	out.doubts(s.Tags)
	out.agent(s)
	return slices.DeleteFunc(out.gathered, func(f *dto.MetricFamily) bool { return f == nil }), nil
}

// Beside returns a gatherer of what another one gathers and of the collector's series, sorted
// by the names of the metrics, of which they must have none in common.
func (c *Collector) Beside(other prometheus.Gatherer) prometheus.Gatherer {
	return prometheus.GathererFunc(func() ([]*dto.MetricFamily, error) {
		all, err := other.Gather()
		ours, errOurs := c.Gather()
		all = append(all, ours...)
		slices.SortFunc(all, func(a, b *dto.MetricFamily) int { return strings.Compare(a.GetName(), b.GetName()) })
		return all, errors.Join(err, errOurs)
	})
}

// figure leaves out what there is none of: a value that is not trusted is absent,
// never zero.
func (o *sink) figure(name string, f *loads.Figure) {
	if !f.Measured() {
		return
	}
	o.gauge(duty, f.Duty, name)
	o.gauge(uncertainty, f.Uncertainty, name)
	o.gauge(random, f.Random, name)
	o.gauge(latent, truth(f.Latent), name)
	if f.Content != 0 { // a vessel, which has no flow
		o.gauge(content, celsius(f.Content), name)
		return
	}
	o.gauge(massFlow, f.MassFlow, name)
	if f.Idle {
		return
	}
	o.gauge(inlet, celsius(f.Inlet), name)
	o.gauge(outlet, celsius(f.Outlet), name)
}

var grades = [...]quality.Quality{quality.Good, quality.Uncertain, quality.Bad}

func (o *sink) quality(name string, f *loads.Figure) {
	for _, q := range grades {
		o.gauge(grade, truth(q == f.Quality()), name, q.String())
	}
}

func (o *sink) load(l *view.Load, now design.Verdict) {
	o.counter(heat, l.Booked.Given, l.Name, "given")
	o.counter(heat, l.Booked.Taken, l.Name, "taken")
	o.counter(bridgedHeat, l.Booked.BridgedGiven, l.Name, "given")
	o.counter(bridgedHeat, l.Booked.BridgedTaken, l.Name, "taken")
	o.counter(spent, float64(l.Booked.Measured)/1e9, l.Name, "measured")
	o.counter(spent, float64(l.Booked.Bridged)/1e9, l.Name, "bridged")
	o.counter(spent, float64(l.Booked.Missing)/1e9, l.Name, "missing")
	if w := l.Witness; w != nil {
		o.witness(l.Name, w)
	}
	o.counter(doubtful, float64(l.Booked.Uncertain)/1e9, l.Name)
	if l.Design != 0 {
		o.gauge(expected, l.Design, l.Name)
		o.gauge(expectedU, l.DesignError, l.Name)
	}
	if l.Compared {
		o.gauge(off, l.Deviation, l.Name)
		o.gauge(offU, l.DeviationError, l.Name)
	}
	for _, v := range design.Verdicts {
		o.gauge(verdict, truth(v == now), l.Name, v.String())
	}
}

func (o *sink) warnings(all []warn.Watched) {
	for i := range all {
		w := &all[i]
		kind := string(w.Kind)
		o.gauge(warnActive, truth(w.Active), w.Subject, kind)
		o.gauge(warnMarked, truth(w.Acknowledged), w.Subject, kind)
		o.gauge(warnShelf, truth(w.Shelved), w.Subject, kind)
	}
}

func (o *sink) witness(name string, w *view.Witness) {
	o.gauge(counted, w.Counted, name)
	o.gauge(served, w.Served, name)
	if w.Told {
		o.gauge(deviation, w.Deviation, name)
	}
}

func (o *sink) means(s *view.Snapshot, i int, now int64) {
	name := s.Loads[i].Name
	for k := range s.Loads[i].Means {
		m := s.Mean(i, k, now)
		if m.Coverage > 0 {
			o.gauge(dutyMean, m.Duty, name, windowNames[k])
		}
		o.gauge(coverage, m.Coverage, name, windowNames[k])
	}
}

func (o *sink) tag(t *view.Tag) {
	if t.Newest != 0 {
		o.gauge(reading, seconds(t.Newest), t.Name)
	}
	if t.MaxAge > 0 {
		o.gauge(maxAge, float64(t.MaxAge)/1e9, t.Name)
	}
	o.counter(readings, float64(t.Accepted), t.Name)
	o.counter(late, float64(t.Late), t.Name)
	o.counter(repeated, float64(t.Repeated), t.Name)
	if t.Counter {
		o.counter(unclear, float64(t.Resets), t.Name, "reset")
		o.counter(unclear, float64(t.Leaps), t.Name, "implausible")
	}
	for _, d := range t.Doubted {
		o.counter(doubted, float64(d.Count), t.Name, d.Reason)
	}
	for _, r := range t.Refused {
		if r.Count > 0 {
			o.counter(refused, float64(r.Count), t.Name, r.Reason)
		}
	}
}

// reasons are those of all marks.
var reasons = view.Doubts()

// doubts adds up over the tags, so that every reason has a series from the start.
func (o *sink) doubts(tags []view.Tag) {
	sums := make(map[string]uint64, len(reasons))
	for i := range tags {
		for _, d := range tags[i].Doubted {
			sums[d.Reason] += d.Count
		}
	}
	for _, reason := range reasons {
		o.counter(doubts, float64(sums[reason]), reason)
	}
}

// refusals adds up over the tags, so that every reason has a series from the start.
func (o *sink) refusals(tags []view.Tag) {
	if len(tags) == 0 {
		return
	}
	for k, r := range tags[0].Refused {
		var sum uint64
		for i := range tags {
			sum += tags[i].Refused[k].Count
		}
		o.counter(refusals, float64(sum), r.Reason)
	}
}

func (o *sink) agent(s *view.Snapshot) {
	if s.At != 0 {
		o.gauge(eventTime, seconds(s.At))
	}
	for _, b := range s.AllBrokers() {
		o.broker(&b)
	}
	if s.Sparkplug != nil {
		o.sparkplug(s.Sparkplug)
	}
	o.counter(steps, float64(s.ClockSteps))
	o.gauge(bytes, float64(s.History.Bytes))
	o.gauge(fileBytes, float64(s.History.FileBytes))
	o.gauge(writable, truth(s.History.Fault == ""))
	o.counter(damaged, float64(s.History.Damaged))
	o.counter(failures, float64(s.History.Failures))
	o.counter(lost, float64(s.History.Lost))
	o.counter(lostMins, float64(s.History.LostMinutes))
}

// broker leaves the label out of the series of the main one, which often is the only one.
func (o *sink) broker(b *view.Broker) {
	o.gauge(connected, truth(b.Connected), b.Name)
	o.gauge(topics, float64(b.Topics), b.Name)
	o.counter(losses, float64(b.Losses), b.Name)
	o.counter(unknown, float64(b.UnknownTopic), b.Name)
	o.gauge(waiting, float64(b.Waiting), b.Name)
	o.counter(published, float64(b.Published), b.Name)
	o.counter(unsent, float64(b.Unpublished), b.Name)
}

func truth(b bool) float64 {
	if b {
		return 1
	}
	return 0
}

// celsius drops what the way over kelvins leaves beyond the sixth decimal.
func celsius(kelvin float64) float64 { return math.Round((kelvin-273.15)*1e6) / 1e6 }

// seconds keeps milliseconds, and no more digits than float64 holds.
func seconds(ns int64) float64 { return math.Round(float64(ns)/1e6) / 1e3 }
