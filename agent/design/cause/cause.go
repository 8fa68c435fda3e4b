// Package cause ranks what to look at first where a duty has left its design, by the
// evidence that there is. It is pure.
//
// [Rank] weighs three sorts of cause on one scale of 0 to 1. What runs away from its design
// point counts by the share of the deviation that it explains. Instruments and fouling are
// told apart by their signatures: each moves the closure of the balance, the conductance, a
// witness and the tests of single instruments in its own direction, and the one whose
// direction the figures follow best comes first (see isolate.go). What leaves the figures
// themselves in doubt, such as unsteady operation or a phase change, counts by how sure it
// is. Causes whose signatures the figures cannot tell apart name each other.
package cause

// Kind is a cause. Its text is part of the agent's interface.
type Kind string

// The kinds, in the order in which equally heavy causes are told.
const (
	Unsteady          Kind = "unsteady operation"
	Swapped           Kind = "inlet and outlet swapped"
	FlowAway          Kind = "flow away from design"
	InletAway         Kind = "inlet away from design"
	LowDifference     Kind = "low temperature difference at high flow"
	FlowMeter         Kind = "flow meter suspect"
	InletSensor       Kind = "inlet sensor suspect"
	OutletSensor      Kind = "outlet sensor suspect"
	Fouling           Kind = "conductance falling"
	NearBoiling       Kind = "near boiling"
	NearDewPoint      Kind = "near dew point"
	NearFreezing      Kind = "near freezing"
	InstrumentsUnsure Kind = "instruments unsure"
	ExpectationUnsure Kind = "expectation unsure"
)

// Kinds lists them all, in that order.
func Kinds() []Kind {
	return []Kind{
		Unsteady, Swapped, FlowAway, InletAway, LowDifference, FlowMeter, InletSensor, OutletSensor,
		Fouling, NearBoiling, NearDewPoint, NearFreezing, InstrumentsUnsure, ExpectationUnsure,
	}
}

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
