// Package cause ranks what to look at first where a duty has left its design, by the
// evidence that there is. It is pure.
package cause

// Kind is a cause. Its text is part of the agent's interface.
type Kind string

// Figure is one of the figures that a cause stands on.
type Figure struct {
	Name   string  // such as "flow against design"
	Value  float64 // SI, or a ratio
	Unit   string  // SI unit, "1" of a ratio
	Stands float64 // standard uncertainties by which it stands out; 0 where that means nothing
}

// Cause is one thing that may be behind a deviation.
type Cause struct {
	Kind    Kind
	Weight  float64  // share of the deviation that it explains, or how well, 0 to 1
	Says    string   // one line for people, without a full stop
	Subject string   // tag, load or exchanger that it is about; may be empty
	Figures []Figure // that it stands on
	Alike   []Kind   // causes that the evidence cannot tell from this one
}
