// Package loads computes the sensible heat duty and the energy registers of
// every load, in event time.
//
// It is pure: no clock, no I/O, no goroutine. Readings and the progress of
// event time come in as a [Beat]; the same beats give the same figures to the
// last bit, whichever way they are cut.
//
// Figures are computed on a grid aligned to the epoch. The figure of the
// interval [g, g+grid) is worked from the values known at g: each tag holds its
// last reading until its maximum age, or where it reports by exception while its source
// is alive. What a load remembers beside is how a vessel's temperature went of late, and
// what is between a stream's thermometers. An interval is booked when event time has
// passed its end, either as measured, with its heat, or as missing. Some time is decided
// on later: a short gap, which a straight line may fill once data come back, and what a
// counter has not told yet. Registers and minutes know it when it is decided, in the
// order of time; figures and rolling means are live.
//
// The duty is of sensible heat. Of a liquid near boiling, or a gas near its dew point,
// there is none, since its heat may be latent. Of a wet gas there is the sensible part
// even below the dew point, with a [Remark] that says so; a liquid near freezing has
// one too. Every tag that a load names is needed for its duty.
//
// A duty carries its standard uncertainty by the law of propagation (JCGM 100:2008). What
// lasts is told by its signed parts: accuracies, dead bands, rounding, the fluid's own
// figures, the strength of a mixture, of which one error moves cp and density at once.
// Over a period each part adds up as it stands. What changes from reading to reading is
// told by the differences between them, and adds up as variances do.
//
// A reading may be marked as uncertain or bad, by its source or by a test. An uncertain one is
// used: its figures carry the mark, and their time is counted as uncertain within the measured.
// From a bad one on its tag has no value, until there is a better one: loads that need it have
// no figure, as where data are missing, and a bridge works over that; what is in a hold is
// not known any more, a fitted rate has no point there, a heartbeat is none, and of a tag that
// reports by exception nothing that stood before does. A counter counts on: a bad count is
// none, and the next tells what has passed since the last good one, for a load as for a
// witness, unless the bad one says that the register may have stood still.
//
// Instants and spans are int64 nanoseconds (Unix time); temperatures K,
// pressures absolute Pa, mass flow kg/s, duty W, heat J.
package loads

import (
	"math"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/screen"
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
	Mark  quality.Mark // what its source says of it
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
	// Resolution is the step of the tag's numbers, and Deadband how far the quantity
	// may move before a source that reports by exception tells of it; SI, 0 where
	// unknown or none. What they leave open lasts for as long as a number stands, so it is
	// a systematic part of the uncertainty.
	Resolution, Deadband float64
	// OnChange says that the source reports by exception: a reading holds, whatever its
	// age, while the source is alive. Alive is then the index of the tag that tells so:
	// a reading of it that is not zero holds for its own MaxAge, and one of zero says
	// that the source has gone. A reading of the tag itself is a sign of life as well, for
	// as long, so that a source may tell its values before it beats. After a lapse a new
	// reading is wanted: what was read at or before the last grid point without a sign of
	// life does not hold.
	OnChange bool
	Alive    int
	// Counter is set where the tag is a register that only rises.
	Counter *Counter
	// Screen is what its readings are tested against in the order of their stamps, nil for
	// nothing. Of those that fall to one grid point only the last is.
	Screen *screen.Limits
	// Beside is the index of a second sensor of the same quantity, where HasBeside. Where both
	// read and differ by more than two standard uncertainties of the difference, what is
	// worked from either is [quality.Disagrees].
	Beside    int
	HasBeside bool
	// Meaning tells what the tag's numbers are of. What was read under another is not taken
	// up by [Engine.Restore]: the difference of two counts of which one was of something
	// else, or in another unit, is no amount.
	Meaning string
}

// Counter is a register of volume or mass (for a flow) or of energy (for a witness)
// that counts up, in SI: m³, kg, mol or J.
type Counter struct {
	// Modulus is the count at which the register starts again from zero; 0 where it
	// does not roll over in its life.
	Modulus float64
	// Largest is the rate above which a difference is no count but a fault, in the unit
	// of the register a second; 0 for no bound.
	Largest float64
	// Each says that a reading is what has passed since the one before, such as pulses, and
	// no total. Those of one tag are told apart by their stamps alone.
	Each bool
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
	// MeterAtOutlet says in which pipe the meter sits: the density of a volume, and of what
	// is CalibratedAt one, is taken there.
	MeterAtOutlet bool
	// CalibratedAt is the density, kg/m³, for which a flow by differential pressure was
	// reckoned, at the place of the meter; 0 of any other flow. Such a meter shows the root of
	// what it feels, ρ·v², so that of another density ρ
	//
	//	m = m_shown·√(ρ/ρ_design),  V = V_shown·√(ρ_design/ρ)
	//
	// and a molar flow as one by mass. The geometry and its coefficients are taken to be as
	// reckoned (ISO 5167-1:2003, 5.1, from which both follow).
	CalibratedAt float64
	// Gives is true where the stream gives heat up: duty is then
	// m·(h_in − h_out), otherwise m·(h_out − h_in).
	Gives bool
	// BothWays says that the stream is warmed at times and cooled at others. Otherwise the
	// figure is [quality.WrongOrder] where the inlet is on the wrong side of the outlet by
	// more than two standard uncertainties of their difference.
	BothWays bool
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
	// nothing is taken to flow. A counter is taken at its word.
	IdleBelow float64
	// Pair is the correlation of the errors of inlet and outlet thermometer, 0 to 1:
	// that of a matched pair is near 1.
	Pair float64
	Corrections
}

// Corrections are what a stream may be corrected for. The zero value has none.
type Corrections struct {
	// Pump is the power that a pump or fan between the two thermometers leaves in the
	// stream as heat, W: a stream that gives heat gives it up as well as what the
	// thermometers show, and one that takes heat has taken so much less. It counts only
	// while the stream flows.
	Pump    Source
	HasPump bool
	// Hold is the volume between the two thermometers, m³: the outlet is compared with
	// the inlet of the parcel that leaves now. 0 for none. It is plug flow: nothing mixes but
	// within a sixtieth of the hold, as much volume leaves as passes the meter, at the
	// meter's density (a flow by mass is taken at that of the inlet), and how far off Hold
	// may be is not in the uncertainty. A stopped flow stands; heat that it loses to the
	// room counts as served. Until the hold has been filled once, after the start and after
	// each time without flow, inlet or its pressure, the load is [Fitting]: to compare with
	// what enters now would book what the content stores. A reverse flow empties it.
	Hold float64
	// Stored is the heat capacity of what lies between the thermometers, content and
	// metal, J/K: C times the rise of the mean of inlet and outlet, fitted over StoredOver,
	// ns, is not the load's. 0 for none. With a Hold it is that of the metal alone, since
	// parcels keep account of the content. It is taken to be known within 10 % (common
	// practice for what drawings tell, no source), in the share of the content. The rate is
	// that of the middle of the span; too few readings to tell it are [Fitting]. Without a
	// flow nothing is corrected.
	Stored     float64
	StoredOver int64
}

// Vessel is a closed content whose temperature tells the heat that it takes up or
// gives: a tank, a batch, a bed. Its duty is
//
//	Q = ± (m·c + Shell)·dT/dt
//
// with the slope of the line through the readings of the last Over, in which those of each
// sixtieth of it count as one of their weight, and c of the fluid at their mean: cp, or of a
// Rigid vessel cv. What a duty changes comes half of Over late; over a longer time the heat
// is that of the content half of Over before either end. Less than three readings, or
// readings over less than half of Over, are [Fitting].
//
// Noise has a slope as well, and would raise both registers for ever. So the content is at
// rest where the duty is within IdleBelow, or within two of its random standard
// uncertainties, of zero. With normal noise and 60 readings that leaves in each register
// 0.05 of one such uncertainty on the mean, where there would be 0.40; IdleBelow at four of
// them leaves next to nothing. The cost: of a steady duty of 1, 2, 3 and 4 standard uncertainties
// 40, 70, 92 and 99 % are booked. A tank of 500 kg of water read each 10 s with a scatter of
// 0.05 K has one of 78 W over ten minutes; it falls with Over to the power of 3/2. For losses
// that are slow and small, Over must be long.
//
// An offset of the thermometer cancels in a difference of temperatures. What lasts is in the
// share of the content: its amount, the gain of the thermometer's scale (the relative part of
// its accuracy), the wall within 10 % (common practice, no source), and the temperature at
// which c and density are taken. The scatter about the line is the random part. Its variance
// is taken to last for Over, which is an upper bound: over a long time slopes add up to a
// difference of two temperatures, however many they are.
type Vessel struct {
	Fluid       thermo.Fluid
	Temperature Source // K
	Pressure    Source // absolute Pa; of a rigid vessel only with Rigid
	// Rigid says that the vessel keeps its volume, so that its gas takes up
	// dU = m·cv·dT; otherwise it stays at its pressure, and takes up dH = m·cp·dT.
	Rigid bool
	// Content is how much there is, in the unit of its kind.
	Content     Source
	ContentKind ContentKind
	// Shell is the heat capacity of the wall that follows the content, J/K.
	Shell float64
	// Over is the span of readings through which the rate is fitted, ns.
	Over int64
	// Still is the change of the content over that span, from the least to the greatest
	// reading as a fraction of the greatest, above which the vessel is being filled or
	// drawn, and its heat is not told by its temperature ([Moving]). It must be more than
	// what the readings of a still vessel scatter.
	Still float64
	// Gives is true where the content gives heat up in the load's service.
	Gives bool
	// IdleBelow is the duty, W, below which the content is taken to rest.
	IdleBelow float64
	Margin    float64 // K, as of a stream
}

// ContentKind tells what a vessel's content is measured in.
type ContentKind uint8

const (
	ContentMass   ContentKind = iota + 1 // kg
	ContentVolume                        // m³, at the vessel's temperature and pressure
)

// Load is one named heat load.
type Load struct {
	Name   string
	Stream Stream
	Vessel *Vessel // the load is this vessel, and no stream, where it is not nil
	// Witness is the energy register of a heat meter in the same circuit, a counter in
	// J, that the load is compared with. It takes no part in any figure.
	Witness    Source
	HasWitness bool
	// Running is the tag of the pump, where HasRunning: 0 while it stands. A flow of the
	// stream beyond its IdleBelow, and beyond two of its standard uncertainties, is then
	// [quality.NotZero].
	Running    Source
	HasRunning bool
	// Bypass is the tag of what leads the flow of the stream past its load, or shuts off what
	// heats or cools it, where HasBypass: open from [BypassOpen] on. Once it has been so for
	// Settles ns, ends that are more than two standard uncertainties apart are
	// [quality.NotZero].
	Bypass    Source
	HasBypass bool
	Settles   int64
	// Drivers are the means that a verdict on the load wants to know, at most [MaxDrivers]:
	// the outdoor temperature, a rate of production. They take no part in any figure, and one
	// that is missing or bad is NaN and makes no load blind.
	Drivers []Source
}

// gives tells which way the load serves.
func (l *Load) gives() bool {
	if l.Vessel != nil {
		return l.Vessel.Gives
	}
	return l.Stream.Gives
}

// counter returns the tag that counts the load's flow; -1 where it is a rate.
func (l *Load) counter(tags []Tag) int {
	if i := l.Stream.Flow.Tag; l.Vessel == nil && i >= 0 && tags[i].Counter != nil {
		return i
	}
	return -1
}

// Config is the whole plant as the engine sees it.
type Config struct {
	Grid int64 // ns; divides a minute
	// Bridge is the longest time without data, ns, that is filled with a straight line
	// between the duties at its ends once data come back; 0 for none.
	Bridge int64
	Tags   []Tag
	Loads  []Load
}
