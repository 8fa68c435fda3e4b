package sparkplug

import (
	"fmt"

	"heatreeve/ingest/quality"
)

// Reading is what a message says of one metric, or of whether a source is alive.
type Reading struct {
	ID    int   // the number that [Options.Want] gave the metric, or the source
	At    int64 // Unix nanoseconds
	Value float64
	Truth bool // the value is true, which is 1, or false, which is 0
	// Mark says what the source thinks of the value. From a bad one on, the metric has no
	// value; Value may then be NaN.
	Mark       quality.Mark
	Stamped    bool // At came from the message
	Historical bool // of the past: it has no part in what is so now
	Wrong      Wrong
	Datatype   Datatype // as far as known
	Stamp      uint64   // what the message was stamped, ms; only with Stamped
}

// Wrong says why a metric gave no value that can be used.
type Wrong uint8

// In the order in which a metric is looked at.
const (
	Right      Wrong = iota
	Transient        // its source asks that it be not stored
	Missing          // no value, and not null either
	NotNumber        // text, bytes or a nested value
	NoDatatype       // an integer, and no birth has told of which kind
	Mismatch         // a value that its datatype cannot have
	NotFinite        // NaN or infinite
	Undated          // historical, without a time stamp of its own
	NoInstant        // stamped beyond what a clock can show
	UnsetClock       // stamped before [Options.Earliest]
	Ahead            // stamped further in the future than [Options.Ahead]
)

var wrongNames = [...]string{
	"right", "transient", "missing", "not a number", "no datatype", "mismatch", "not finite", "undated", "no instant", "unset clock", "ahead",
}

func (w Wrong) String() string {
	if int(w) < len(wrongNames) {
		return wrongNames[w]
	}
	return fmt.Sprintf("Wrong(%d)", uint8(w))
}

// Counts are what a [Space] has met since it was made.
type Counts struct {
	Births       uint64 // of nodes and devices
	Deaths       uint64 // of nodes and devices
	LateDeaths   uint64 // of a session of the node that was over, which change nothing
	Gaps         uint64 // in the sequence of a node
	Missed       uint64 // messages that are missing in these
	Reordered    uint64 // messages that were missing and came later
	Unborn       uint64 // messages of a source without a birth that holds
	UnknownAlias uint64 // metrics whose alias no birth has told
	Malformed    uint64 // messages that are no Sparkplug B
	Crowded      uint64 // metrics of births, and messages of sources, that there is no room for
	Requests     uint64 // births asked for
}
