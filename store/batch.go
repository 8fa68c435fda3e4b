package store

// Reading is one value of one tag. At is its event time in Unix nanoseconds,
// Value is in SI units. Stamped tells that At came with the value rather than
// from the clock at arrival.
type Reading struct {
	Tag     uint32
	At      int64
	Value   float64
	Stamped bool
	// Mark is what the source says of the value; 0 is good. What the others are, the
	// program that writes them knows.
	Mark uint8
}

// Beat is one step of the engine: the readings that came in, in the order in
// which they were applied, and how far event time has come (Unix nanoseconds).
type Beat struct {
	Through  int64
	Readings []Reading
}

// Shares is how many parts the uncertainty of a record is told in. What they are, the
// program that writes them knows; their order never changes, and new ones come last.
const Shares = 16

// Minute is what a load did in the minute that begins at Start (Unix
// nanoseconds). Times are in s and heat in J; Duty, DutyMin, DutyMax and
// DutyUncertainty in W; Flow in kg/s; Inlet, Outlet and Content in K; Pressure in Pa,
// absolute. Of Duty and what comes after it up to Content the nearest float32 is kept,
// which is to a part in ten million; times and heat are kept as they are.
type Minute struct {
	Load  uint32
	Start int64

	Measured, Bridged, Missing              float64
	Given, Taken                            float64 // in the measured time
	BridgedGiven, BridgedTaken              float64
	Latent                                  float64 // s within Measured
	Uncertain                               float64 // s within Measured; 0 in records from before it was kept
	Duty, DutyMin, DutyMax, DutyUncertainty float64
	Flow                                    float64
	Inlet, Outlet                           float64
	Pressure                                float64
	Content                                 float64
	// Systematic is what each part adds to the uncertainty of the measured heat, signed,
	// J, and Random the variance of what does not last, J². Systematic and the root of
	// Random are kept to a part in a thousand; less than 15 µJ is 0, and more than 10^14 J
	// or no number is infinite.
	Systematic [Shares]float64
	Random     float64
	// Witness is the heat that another meter counted in spans that ended in this minute
	// and were measured throughout, and Compared that of the load in the same spans.
	Witness, Compared float64
	// Expected is the duty that was expected of the load in this minute, W, and ExpectedError
	// its standard uncertainty by what lasts; both are 0 where nothing was.
	Expected, ExpectedError float64
}

// expects tells whether anything was expected of the load.
func (m *Minute) expects() bool { return m.Expected != 0 || m.ExpectedError != 0 }

// Register is the running total of a load: heat in J, times in s. Retention never
// removes it.
type Register struct {
	Load                       uint32
	Given, Taken               float64
	BridgedGiven, BridgedTaken float64
	Measured, Bridged, Missing float64
	Uncertain                  float64 // within Measured; 0 in records from before it was kept
}

// Batch is what one [Store.Commit] writes in one transaction. Minutes and
// Registers replace those of the same load (and start), and Events those of the same At and
// Number. Checkpoint, when not nil,
// replaces the engine's state and stands for everything up to and including
// this batch's beats.
type Batch struct {
	Beats      []Beat
	Minutes    []Minute
	Registers  []Register
	Events     []Event
	Checkpoint []byte
	// Site, when not nil, is the site file that is in force from then on. One that is already
	// is not written again.
	Site *SiteFile
}
