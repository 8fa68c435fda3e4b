package design

import "heatreeve/agent/design/cause"

// Kind is what a warning is about. Its text is part of the agent's interface.
type Kind string

// The kinds. Short and over are of a load whose duty lies beyond its allowance; drifting of
// one whose duty has left what is expected by less; fouling and unbalanced are of an
// exchanger.
const (
	WarnShort      Kind = "short"
	WarnOver       Kind = "over"
	WarnDrifting   Kind = "drifting"
	WarnFouling    Kind = "fouling"
	WarnUnbalanced Kind = "unbalanced"
)

// Kinds lists them all, those of a load first.
func Kinds() []Kind {
	return []Kind{WarnShort, WarnOver, WarnDrifting, WarnFouling, WarnUnbalanced}
}

// OfExchanger tells whether the kind is of exchangers, and not of loads.
func (k Kind) OfExchanger() bool { return k == WarnFouling || k == WarnUnbalanced }

// Warning is that something has left its design. Instants are Unix nanoseconds of event
// time.
type Warning struct {
	Kind    Kind
	Subject string // name of the load or exchanger
	Begin   int64  // when it was raised
	End     int64  // when it was over; 0 while it lasts
	Since   int64  // when what it is about began, as far as can be told; at most Begin
	// Now and Greatest are the deviation as a fraction of what is expected, signed, at the
	// last minute and where it was greatest; of fouling that of the conductance UA, of an
	// unbalanced exchanger that of the two duties from each other.
	Now, Greatest float64
	// Significance is Now in its standard uncertainties (the zeta score).
	Significance float64
	Causes       []cause.Cause // what to look at first, likeliest first
}
