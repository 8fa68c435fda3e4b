// Package ingest turns what an MQTT broker delivers into readings in SI units.
//
// It has two halves. A [Decoder] is pure: bytes and an arrival instant in,
// readings or refusals out. A [Session] keeps one persistent MQTT 3.1.1 session
// alive, decodes what comes in and holds it, bounded, until the caller takes it.
//
// A payload is a bare number ("12.4") or JSON, where each tag finds its value
// and its time stamp by a JSON Pointer (RFC 6901), and may find the quality and the
// unit that the message tells; one message may feed many tags, and carry many samples
// of each. What cannot be trusted is refused, with one [Reason] of a closed set,
// and never repaired: no value is clamped, defaulted or guessed. What its source calls
// bad, or null, is a reading that has no value.
//
// A message is acknowledged to the broker only after the caller has said, with
// [Session.Ack], that all its readings are on disk. Until then the broker keeps
// it and delivers it again after a lost connection or a crash, so readings may
// repeat and the caller's booking has to be idempotent: tag and time stamp are
// the key.
package ingest

import "heatreeve/ingest/quality"

// Reading is one accepted value of one tag.
type Reading struct {
	Tag     int     // index into the tags given to [New] or [NewDecoder]
	At      int64   // event time, Unix nanoseconds: the payload's stamp, else the arrival
	Value   float64 // SI, finite, within the tag's Min and Max
	Stamped bool    // At came from the payload
	// Mark says what the source thinks of the value. One that is bad is accepted
	// without being used: from At on the tag has no value until there is a better one.
	// Its Value may be NaN.
	Mark quality.Mark
	// InOrder says that the message came in the order in which the broker keeps
	// what it has for this session: QoS 1 and not retained. Others overtake what
	// is still kept. A [Decoder] leaves it false; a [Session] sets it.
	InOrder bool
	// Retained says that the broker had kept the message for newcomers, so that its
	// stamp tells nothing of the present. A [Session] sets it.
	Retained bool
}
