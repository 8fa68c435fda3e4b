// Package site reads the site file: which broker, tags, fluids and loads a
// plant has.
//
// [Load] and [Parse] read YAML strictly and return either a [Site] in which
// everything is in SI units, finite and within range, or [Faults]: every fault of
// the file at once, each with its line, column and path, what was found and
// what is allowed. Nothing is defaulted without being described here, and
// nothing is dropped.
//
// A stream's fluid is one that the file declares, by one of the kinds that [Keys] lists
// under "fluids.*", or any that package named knows. [ParseFluid] reads one by itself.
//
// A quantity is written with its unit and read by package unit. A gauge pressure
// becomes absolute here, with the barometer of the site. Names of tags, loads and
// fluids end up as metric labels: they are printable, at most 64 bytes long and
// unique.
package site

import (
	"time"

	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// Site is a checked site file.
type Site struct {
	Digest    [32]byte // SHA-256 of the file's text
	Name      string
	Zone      *time.Location // of days and months in reports
	Barometer float64        // Pa; 0 when the file gives none, and then it has no gauge pressure
	Broker    Broker
	Fluids    map[string]thermo.Fluid // the declared ones
	Tags      []Tag                   // in file order
	Loads     []HeatLoad              // in file order
	Timing    Timing
	History   History
}

// Tag is one signal on the broker.
type Tag struct {
	Name, Topic string
	Unit        unit.Unit
	// Scale and Offset turn a number from the payload into SI: Scale·x + Offset.
	// For a gauge pressure Offset is the barometer, and the result is absolute.
	Scale, Offset float64
	Value, Time   string // JSON Pointers (RFC 6901); "" is a bare number, and arrival time
	TimeFormat    string // "s", "ms", "us", "rfc3339"; "" to tell by shape and magnitude
	Accuracy      Accuracy
	MaxAge        time.Duration // how long a reading is held; default 60 s
	Min, Max      float64       // instrument range, SI, absolute; when absent what no plant has
	QoS           byte          // always 1: each reading is acknowledged when it is on disk
}

// Accuracy is the half-width of what an instrument may be off, in SI at the SI
// reading x: Abs + Rel·|x − Zero|. It is the limit of a rectangular distribution;
// the standard uncertainty is the half-width over √3 (JCGM 100:2008, 4.3.7).
type Accuracy struct{ Abs, Rel, Zero float64 }

// HalfWidth is the largest error at the reading x, both in SI.
func (a Accuracy) HalfWidth(x float64) float64 {
	d := x - a.Zero
	if d < 0 {
		d = -d
	}
	return a.Abs + a.Rel*d
}

// HeatLoad is one heat load: a stream with its inlet and outlet, and what it was
// designed for.
type HeatLoad struct {
	Name   string
	Stream Stream
	Design Design
}

// Source is where a figure comes from: a tag, or a constant of the file.
type Source struct {
	Tag   int     // index into Site.Tags, or -1 for a constant
	Value float64 // the constant, SI, absolute
}

// Constant tells whether the figure is fixed in the file.
func (s Source) Constant() bool { return s.Tag < 0 }

// Stream is the flow of one fluid from an inlet to an outlet.
type Stream struct {
	FluidName                string
	Fluid                    thermo.Fluid
	Flow                     Source
	FlowKind                 unit.Dimension // MassFlow, VolumeFlow or MolarFlow
	Inlet, Outlet            Source         // K
	Pressure, OutletPressure Source         // Pa; the outlet's is the inlet's when not given
	MeterAtOutlet            bool           // where a volume flow is metered
	Gives                    bool           // gives heat, and is colder at the outlet; else it takes heat
	Margin                   float64        // K to saturation below which heat may be latent; default 5, for moist air 1
	IdleBelow                float64        // SI, as the flow; default 0.5 % of the flow tag's range
	// Humidity is that of a gas whose vapour content is measured, at the inlet, in
	// the unit of its kind; HumidityKind is 0 for any other fluid.
	Humidity     Source
	HumidityKind thermo.MoistureKind
	Coil         Source // K, the coldest surface that a moist gas meets; only with HasCoil
	HasCoil      bool
}

// Design is what a load should move.
type Design struct {
	Duty          float64       // W; 0 when the file gives none
	Allow         float64       // fraction of the duty
	Lasting       time.Duration // how long a deviation must stand; default 10 min
	Inlet, Outlet float64       // K; 0 when the file gives none
	Pressure      float64       // Pa, absolute; 0 when the file gives none
}

// Timing is how event time moves.
type Timing struct {
	Grid     time.Duration // step at which loads are computed; default 1 s
	Lateness time.Duration // how long event time waits for stragglers; default 5 s
	Ahead    time.Duration // stamps further in the future are refused; default 30 s
	Commit   time.Duration // between two writes to disk; default 10 s
	Beat     time.Duration // 1 s
}

// History bounds what is kept on disk.
type History struct {
	MaxAge   time.Duration // default 730 d
	MaxBytes int64         // default 256 MiB
}
