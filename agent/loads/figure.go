package loads

import (
	"cmp"
	"fmt"

	"heatreeve/ingest/quality"
)

// Fault says why a load has no figure. Its text is part of the agent's
// interface.
type Fault uint8

const (
	NoFault    Fault = iota
	NoReading        // a tag has no reading yet
	Stale            // a tag's last reading is older than its maximum age
	Reverse          // flow is below zero by more than the idle threshold
	Saturation       // a liquid near boiling, or a gas near its dew point
	OutOfRange       // a state lies outside the fluid's range
	Moving           // a vessel is being filled or drawn
	Fitting          // too few readings yet to tell a rate
	BadReading       // a tag's source says that its value is bad
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
	case Moving:
		return "content changing"
	case Fitting:
		return "fitting"
	case BadReading:
		return "bad reading"
	}
	return fmt.Sprintf("Fault(%d)", uint8(f))
}

// Figure is the duty of one load at one grid point, with what it was worked
// from. Where Fault is set, only Fault, Reason and At mean anything, and with [BadReading]
// Mark and By; where Idle
// is set, duty is zero: the temperatures of a stream are not looked at, and the rate of a
// vessel is not told from rest.
type Figure struct {
	At          int64
	Fault       Fault
	Reason      string // empty without a fault
	Idle        bool
	Duty        float64        // W, positive in the load's service
	Uncertainty float64        // standard, W: root of the sum of squares of Share and Random
	Share       [Parts]float64 // signed systematic contribution of each part to the standard uncertainty, W
	Random      float64        // standard uncertainty by what changes from reading to reading, W
	// Variance is what Random adds to the variance of the heat in a second of the grid,
	// W²·s: each input's squared share times the time for which one reading stands.
	Variance float64
	MassFlow float64 // kg/s
	Density  float64 // at the meter, kg/m³
	Inlet    float64 // K; where the stream has a hold, what the parcel that leaves came in with
	Outlet   float64 // K
	// Content is the temperature of a vessel's content, K, whose mass is Mass, kg, and
	// Rate its fitted rise, K/s; 0 of a stream.
	Content, Mass, Rate float64
	Pressure            float64 // at the inlet, Pa
	Remark
	// Mark is the worst of those of the readings that the figure was worked from, and By
	// the first tag that has it: the flow before the temperatures. Readings in a fitted rate
	// count, and those of the parcels that leave a hold.
	Mark quality.Mark
	By   string
	// Drivers are the values of the load's drivers, SI, NaN where a tag has none; also beside
	// a fault.
	Drivers [MaxDrivers]float64
	Until   int64 // instant at which the figure must be worked anew, where no tag reports before
}

// mark takes in the mark of a reading that the figure uses.
func (f *Figure) mark(m quality.Mark, tag string) {
	if worst := quality.Worse(f.Mark, m); worst != f.Mark {
		f.Mark, f.By = worst, tag
	}
}

// Quality is how far the figure can be relied on: bad where there is none.
func (f *Figure) Quality() quality.Quality {
	if !f.Measured() {
		return quality.Bad
	}
	return f.Mark.Quality()
}

// Doubt says of a measured figure which tag has the mark that it has; it is empty where
// there is none.
func (f *Figure) Doubt() string {
	if !f.Measured() || f.Mark == quality.None {
		return ""
	}
	return fmt.Sprintf("tag %q is %v: %v", f.By, f.Mark.Quality(), f.Mark)
}

// Beside is why there is no figure, or what to bear in mind with one; it is empty where there is
// nothing to say.
func (f *Figure) Beside() string {
	if d := f.Doubt(); d != "" && f.Note != "" {
		return d + "; " + f.Note
	}
	return cmp.Or(f.Reason, f.Doubt(), f.Note)
}

// uncertain reports whether the time of a measured figure is uncertain.
func (f *Figure) uncertain() bool { return f.Mark.Quality() == quality.Uncertain }

// Measured reports whether the figure may be booked.
func (f *Figure) Measured() bool { return f.Fault == NoFault }
