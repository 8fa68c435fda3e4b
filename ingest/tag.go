package ingest

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"unicode/utf8"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/sparkplug"
	"heatreeve/thermo/unit"
)

// MaxPayload is the longest payload that is read, in bytes; a longer one is
// refused as [TooLarge]. The figure is our own: a message of a few tags has
// under 1 kB, so 64 KiB leaves room for a large gateway's collected message.
const MaxPayload = 64 << 10

const maxTopic = 65535 // bytes: MQTT 3.1.1, section 1.5.3, length prefix of a string

// Time formats of a payload's stamp. All count from 1970-01-01 UTC without leap
// seconds, and numbers may have a fraction.
const (
	TimeAny     = ""        // a number by its magnitude (s, ms or µs), a string as RFC 3339
	TimeSeconds = "s"       // a number of seconds
	TimeMillis  = "ms"      // a number of milliseconds
	TimeMicros  = "us"      // a number of microseconds
	TimeRFC3339 = "rfc3339" // a string such as "2024-03-31T01:30:00.5+01:00"
)

// Tag says where one instrument's readings are found and what they mean.
type Tag struct {
	Name       string
	Topic      string // exact topic, no wildcard
	Value      string // JSON Pointer of the value; "": the payload is a bare number
	Time       string // JSON Pointer of the time stamp; "": the arrival counts
	TimeFormat string // one of the Time constants
	// Samples is set where a message carries a list of readings of the tag; Value, Time and
	// the place of Quality are then pointers into each of its elements.
	Samples *Samples
	Quality *Quality // nil: the messages tell none
	// UnitAt is the JSON Pointer of the unit that the message names, into the message as a
	// whole; "": it names none. Any spelling of Unit, that of its numbers, is accepted.
	UnitAt string
	Unit   unit.Unit

	Scale  float64
	Offset float64 // SI = Scale·x + Offset
	Signal Signal  // in place of Scale and Offset; nil: they hold

	// Truth lets true and false stand in place of the number: they are 1 and 0 in SI, whatever
	// the unit. Not beside a Signal.
	Truth bool

	// Holds is set where a value counts until another comes: where the source is silent while
	// nothing changes, or each message adds to those before. A value that is refused then leaves
	// a bad one.
	Holds bool

	Min, Max float64 // SI, instrument range, both ends allowed; ±Inf: no limit
	QoS      byte    // 0 or 1; 1 is needed for delivery after a crash
	// Liveness is set where the messages tell not a value but whether their source is
	// alive.
	Liveness *Liveness
	// Metric is set where the tag reads one of a Sparkplug B namespace in place of a topic.
	Metric *Metric
}

// Metric is one that an edge node, or a device behind it, publishes by Sparkplug B. It
// carries its own value, time and quality. With a [Liveness] the tag is 1 from the birth
// of the source to its death, and 0 from there.
type Metric struct {
	Source sparkplug.Source
	Name   string // "" with a Liveness
}

// Signal is a raw signal, of which more than a factor and an offset makes the quantity.
type Signal interface {
	// Convert returns what the number x of the payload means, in SI, and what the signal
	// itself tells of it. Where the mark is bad there is no value.
	Convert(x float64) (si float64, m quality.Mark)
}

// check returns every fault of the tag, joined.
func (t Tag) check() error {
	var faults []error
	fault := func(format string, args ...any) {
		faults = append(faults, fmt.Errorf("tag %q: "+format, append([]any{t.Name}, args...)...))
	}
	if t.Name == "" {
		fault("topic %q: the name is empty", t.Topic)
	}
	if t.Metric != nil {
		if err := t.checkMetric(); err != nil {
			fault("%w", err)
		}
	} else if err := checkTopic(t.Topic); err != nil {
		fault("%w", err)
	}
	for _, p := range t.pointers() {
		if _, err := splitPointer(p); err != nil {
			fault("%w", err)
		}
	}
	if err := t.Quality.check(); err != nil {
		fault("%w", err)
	}
	if err := t.checkSamples(); err != nil {
		fault("%w", err)
	}
	if t.Value == "" && t.Samples == nil && (t.Quality != nil || t.UnitAt != "") {
		fault("quality or unit without a value pointer: a bare number carries none")
	}
	if t.UnitAt != "" && t.Unit.Symbol == "" {
		fault("unit pointer %q, but the tag has no unit to compare with", t.UnitAt)
	}
	if t.Value == "" && t.Samples == nil && t.Time != "" && !t.heartbeat() {
		fault("time pointer %q without a value pointer: a bare number carries no stamp", t.Time)
	}
	switch t.TimeFormat {
	case TimeAny, TimeSeconds, TimeMillis, TimeMicros, TimeRFC3339:
	default:
		fault("time format %q is unknown; known: %q, %q, %q, %q, or none", t.TimeFormat, TimeSeconds, TimeMillis, TimeMicros, TimeRFC3339)
	}
	if t.Signal == nil && (!finite(t.Scale) || t.Scale == 0 || !finite(t.Offset)) {
		fault("scale %v and offset %v must be finite and the scale not 0", t.Scale, t.Offset)
	}
	if l := t.Liveness; l != nil && l.Online == l.Offline && l.Online != "" {
		fault("online and offline are the same word %q", l.Online)
	}
	if !(t.Min < t.Max) {
		fault("minimum %v is not below maximum %v", t.Min, t.Max)
	}
	if t.QoS > 1 {
		fault("quality of service %d; use 1 (or 0, which may lose messages)", t.QoS)
	}
	return errors.Join(faults...)
}

// pointers are all that the tag has.
func (t *Tag) pointers() []string {
	all := []string{t.Value, t.Time, t.UnitAt}
	if t.Samples != nil {
		all = append(all, t.Samples.At)
	}
	if t.Quality != nil {
		all = append(all, t.Quality.At)
	}
	return all
}

func (t *Tag) checkMetric() error {
	source := t.Metric.Source.String()
	if s, err := sparkplug.ParseSource(source); err != nil || s != t.Metric.Source {
		return fmt.Errorf("source %q is no group/node or group/node/device", source)
	}
	switch {
	case t.Topic+t.Value+t.Time+t.TimeFormat+t.UnitAt != "" || t.Samples != nil || t.Quality != nil:
		return fmt.Errorf("a metric of %q and a topic, or places in its messages; a metric carries its own value, time and quality", source)
	case (t.Metric.Name == "") != (t.Liveness != nil):
		return fmt.Errorf("metric %q of %q: one that tells whether its source is alive has no name, any other has one", t.Metric.Name, source)
	}
	return nil
}

func checkTopic(topic string) error {
	switch {
	case topic == "":
		return errors.New("the topic is empty")
	case len(topic) > maxTopic:
		return fmt.Errorf("the topic has %d bytes; MQTT allows %d", len(topic), maxTopic)
	case !utf8.ValidString(topic) || strings.ContainsRune(topic, 0):
		return fmt.Errorf("topic %q must be UTF-8 without NUL", topic)
	case strings.ContainsAny(topic, "+#"):
		return fmt.Errorf("topic %q has a wildcard; a tag is one instrument, give its exact topic", topic)
	case strings.HasPrefix(topic, "$share/"):
		return fmt.Errorf("topic %q is a shared subscription, which would deliver only part of the readings", topic)
	}
	return nil
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
