package store

// Reading is one value of one tag. At is its event time in Unix nanoseconds,
// Value is in SI units. Stamped tells that At came with the value rather than
// from the clock at arrival.
type Reading struct {
	Tag     uint32
	At      int64
	Value   float64
	Stamped bool
}

// Beat is one step of the engine: the readings that came in, in the order in
// which they were applied, and how far event time has come (Unix nanoseconds).
type Beat struct {
	Through  int64
	Readings []Reading
}

// Minute is what a load did in the minute that begins at Start (Unix
// nanoseconds). Measured and Missing are in s, Given and Taken in J; Duty,
// DutyMin, DutyMax and DutyUncertainty in W; Flow in kg/s; Inlet and Outlet in K;
// Pressure in Pa, absolute.
type Minute struct {
	Load  uint32
	Start int64

	Measured, Missing                       float64
	Given, Taken                            float64
	Duty, DutyMin, DutyMax, DutyUncertainty float64
	Flow                                    float64
	Inlet, Outlet                           float64
	Pressure                                float64
}

// Register is the running total of a load: Given and Taken in J, Measured and
// Missing in s. Retention never removes it.
type Register struct {
	Load                            uint32
	Given, Taken, Measured, Missing float64
}

// Batch is what one [Store.Commit] writes in one transaction. Minutes and
// Registers replace those of the same load (and start). Checkpoint, when not nil,
// replaces the engine's state and stands for everything up to and including
// this batch's beats.
type Batch struct {
	Beats      []Beat
	Minutes    []Minute
	Registers  []Register
	Checkpoint []byte
}
