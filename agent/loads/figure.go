package loads

import "fmt"

// Fault says why a load has no figure. Its text is part of the agent's
// interface.
type Fault uint8

const (
	NoFault    Fault = iota
	NoReading        // a tag has sent nothing yet
	Stale            // a tag's last reading is older than its maximum age
	Reverse          // flow is below zero by more than the idle threshold
	Saturation       // a liquid near boiling, or a gas near its dew point
	OutOfRange       // a state lies outside the fluid's range
)

func (f Fault) String() string {
	switch f {
	case NoFault:
		return "none"
	case NoReading:
		return "no reading"
	case Stale:
		return "stale"
	case Reverse:
		return "reverse flow"
	case Saturation:
		return "near saturation"
	case OutOfRange:
		return "out of range"
	}
	return fmt.Sprintf("Fault(%d)", uint8(f))
}

// Figure is the duty of one load at one grid point, with what it was worked
// from. Where Fault is set, only Fault, Reason and At mean anything; where Idle
// is set, duty is zero and the temperatures are not looked at.
type Figure struct {
	At          int64
	Fault       Fault
	Reason      string // empty without a fault
	Idle        bool
	Duty        float64        // W, positive in the load's service
	Uncertainty float64        // standard, W
	Share       [Parts]float64 // signed contribution of each input to the standard uncertainty, W
	MassFlow    float64        // kg/s
	Density     float64        // at the meter, kg/m³
	Inlet       float64        // K
	Outlet      float64        // K
	Pressure    float64        // at the inlet, Pa
	Remark
	Until int64 // instant at which the first held input expires; MaxInt64 for constants alone
}

// Measured reports whether the figure may be booked.
func (f *Figure) Measured() bool { return f.Fault == NoFault }
