// Package loads computes the sensible heat duty and the energy registers of
// every load, in event time.
//
// It is pure: no clock, no I/O, no goroutine. Readings and the progress of
// event time come in as a [Beat]; the same beats give the same figures to the
// last bit, whichever way they are cut.
//
// Figures are computed on a grid aligned to the epoch. The figure of the
// interval [g, g+grid) is worked from the values known at g: each tag holds its
// last reading until its maximum age. An interval is booked when event time has
// passed its end, either as measured, with its heat, or as missing.
//
// The duty is of sensible heat. Of a liquid near boiling, or a gas near its dew point,
// there is none, since its heat may be latent. Of a wet gas there is the sensible part
// even below the dew point, with a [Remark] that says so; a liquid near freezing has
// one too. Every tag that a load names is needed for its duty.
//
// Instants and spans are int64 nanoseconds (Unix time); temperatures K,
// pressures absolute Pa, mass flow kg/s, duty W, heat J.
package loads

import (
	"math"

	"heatreeve/thermo"
)

const (
	second = int64(1e9)
	minute = 60 * second
)

// Reading is one value of a tag in SI units.
type Reading struct {
	Tag   int   // index into [Config.Tags]
	At    int64 // event time
	Value float64
}

// Beat is one step of the agent's work: readings in order of arrival, and the
// instant up to which event time has come. Readings stamped at or before an
// interval that is already booked are late.
type Beat struct {
	Readings []Reading
	Through  int64
}

// Accuracy is the half-width of a rectangular distribution around a reading x,
// Abs + Rel·|x − Zero|, in SI units (for a temperature in °C class formulas Zero
// is 273.15 K; for a gauge pressure it is the barometer).
type Accuracy struct{ Abs, Rel, Zero float64 }

// Standard returns the standard uncertainty at x: half-width/√3 (JCGM 100:2008,
// 4.3.7).
func (a Accuracy) Standard(x float64) float64 {
	return (a.Abs + a.Rel*math.Abs(x-a.Zero)) / math.Sqrt(3)
}

// Tag is what the engine must know of a tag.
type Tag struct {
	Name     string
	MaxAge   int64 // how long a reading is held, ns
	Accuracy Accuracy
}

// Source is where an input comes from: a tag, or a constant where Tag < 0.
type Source struct {
	Tag   int
	Value float64 // the constant, SI
}

// Constant returns a source that always reads v.
func Constant(v float64) Source { return Source{Tag: -1, Value: v} }

// FromTag returns the source that reads the tag with index i.
func FromTag(i int) Source { return Source{Tag: i} }

// FlowKind tells what a flow signal counts.
type FlowKind uint8

const (
	MassFlow   FlowKind = iota + 1 // kg/s
	VolumeFlow                     // m³/s at the meter's own state
	MolarFlow                      // mol/s: normal or standard volume of a gas
)

// Stream is an open stream through a load: it enters in one state and leaves in
// another.
type Stream struct {
	Fluid    thermo.Fluid
	Flow     Source
	FlowKind FlowKind
	Inlet    Source // temperature, K
	Outlet   Source // temperature, K
	Pressure Source // at the inlet, absolute Pa
	// OutletPressure equals Pressure where the site gives only one.
	OutletPressure Source
	// MeterAtOutlet says in which pipe a volume meter sits: its density is
	// taken there.
	MeterAtOutlet bool
	// Gives is true where the stream gives heat up: duty is then
	// m·(h_in − h_out), otherwise m·(h_out − h_in).
	Gives bool
	// Humidity of the gas at the inlet, in the unit of its kind; only with a
	// [thermo.Humid] fluid. HumidityKind is 0 where it is not measured.
	Humidity     Source
	HumidityKind thermo.MoistureKind
	// Coil is the coldest surface that a [thermo.Wet] gas meets on its way, K, where
	// HasCoil; otherwise only the outlet shows whether vapour condenses.
	Coil    Source
	HasCoil bool
	// Margin in K that a liquid must stay below boiling, and a gas above its dew
	// point, for its heat to count as sensible. A wet gas within it is remarked upon,
	// and so is a liquid within it of freezing, but not beyond 3 K.
	Margin float64
	// IdleBelow is the flow, in the flow signal's SI unit, at or below which
	// nothing is taken to flow.
	IdleBelow float64
}

// Load is one named heat load.
type Load struct {
	Name   string
	Stream Stream
}

// Config is the whole plant as the engine sees it.
type Config struct {
	Grid  int64 // ns; divides a minute
	Tags  []Tag
	Loads []Load
}
