package ingest

import "fmt"

// Reason says why a message gave no reading to a tag. The set is closed, so
// that it can label a metric.
type Reason uint8

// In the order in which a message is looked at.
const (
	Empty          Reason = iota // no bytes, or blanks only
	TooLarge                     // payload longer than [MaxPayload]
	NotJSON                      // broken or ambiguous JSON: syntax, duplicate names, not UTF-8, something after the end
	Truncated                    // JSON that ends too early
	ValueMissing                 // the value pointer finds nothing
	WrongType                    // text, true, false, list or object where a number should be
	NotANumber                   // a bare payload that is no decimal number
	NotFinite                    // NaN, Inf or beyond the range of a float64
	UnknownQuality               // the quality is none of its code, or is missing
	UnitMismatch                 // the unit that the message names is not the tag's, or it names none
	TooMany                      // more than [MaxSamples] samples in one list
	WrongWord                    // neither of the two words of an availability topic
	Retained                     // kept by the broker and without a stamp: its age is unknown
	TimeMissing                  // the time pointer finds nothing, or null
	TimeWrong                    // the stamp cannot be read
	UnsetClock                   // stamp before 2000: the publisher's clock is not set
	Ahead                        // stamp further in the future than allowed
	Unborn                       // an integer of Sparkplug B, before a birth that tells of which kind
	Transient                    // not to be stored, says its Sparkplug B publisher
	OutOfRange                   // outside the instrument's range
	Overflow                     // good, but the buffer was full: left with the broker, which delivers it again

	reasons // how many there are
)

var reasonNames = [reasons]string{
	Empty: "empty", TooLarge: "too-large", NotJSON: "not-json", Truncated: "truncated",
	ValueMissing: "value-missing", WrongType: "wrong-type",
	NotANumber: "not-a-number", NotFinite: "not-finite",
	UnknownQuality: "unknown-quality", UnitMismatch: "unit-mismatch", TooMany: "too-many", WrongWord: "wrong-word", Retained: "retained",
	TimeMissing: "time-missing", TimeWrong: "time-wrong", UnsetClock: "unset-clock",
	Ahead: "ahead", Unborn: "before-birth", Transient: "transient", OutOfRange: "out-of-range", Overflow: "overflow",
}

// String returns the reason's word, such as "out-of-range".
func (r Reason) String() string {
	if r < reasons {
		return reasonNames[r]
	}
	return fmt.Sprintf("Reason(%d)", uint8(r))
}

// Reasons returns all reasons, in order: the label set of a metric.
func Reasons() []Reason {
	all := make([]Reason, reasons)
	for i := range all {
		all[i] = Reason(i)
	}
	return all
}

// Counts holds one count a [Reason], indexed by it.
type Counts [reasons]uint64
