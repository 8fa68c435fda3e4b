// Package site reads the site file: which broker, tags, fluids and loads a
// plant has.
//
// [Load] and [Parse] read YAML strictly and return either a [Site] in which
// everything is in SI units, finite and within range, or [Faults]: every fault of
// the file at once, each with its line, column and path, what was found and
// what is allowed. Nothing is defaulted without being described here, and
// nothing is dropped.
//
// A load's fluid is one that the file declares, by one of the kinds that [Keys] lists
// under "fluids.*", or any that package named knows. [ParseFluid] reads one by itself.
//
// A quantity is written with its unit and read by package unit. A gauge pressure
// becomes absolute here, with the barometer of the site. Names of tags, loads and
// fluids end up as metric labels: they are printable, at most 64 bytes long and
// unique.
package site

import (
	"fmt"
	"time"

	"heatreeve/agent/shown"
	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// Site is a checked site file.
type Site struct {
	Text      []byte   // of the file; [Parse] makes the same of it again
	Digest    [32]byte // SHA-256 of Text
	Name      string
	Zone      *time.Location          // of days and months in reports
	Barometer float64                 // Pa; 0 when the file gives none, and then it has no gauge pressure
	Broker    Broker                  // the main one
	Brokers   []Broker                // beside it, in file order
	Fluids    map[string]thermo.Fluid // the declared ones
	Tags      []Tag                   // in file order, and behind them those of [Liveness]
	Loads     []HeatLoad              // in file order
	// Exchangers are those of which both streams are loads, in file order.
	Exchangers []Exchanger
	Timing     Timing
	History    History
	Publish    Publish
	Shown      shown.Units // what the page shows figures in, unless its reader chooses otherwise
}

// Declared is how many of the tags the file declares; those behind them tell whether a
// source is alive.
func (s *Site) Declared() int {
	for i := range s.Tags {
		if s.Tags[i].Liveness != nil {
			return i
		}
	}
	return len(s.Tags)
}

// Tag is one signal on the broker.
type Tag struct {
	Name, Topic string
	Broker      int // index into [Site.AllBrokers]
	Unit        unit.Unit
	// Scale and Offset turn a number from the payload into SI: Scale·x + Offset, but of a raw
	// Signal. For a gauge pressure Offset is the barometer, and the result is absolute.
	Scale, Offset float64
	Signal        *Signal   // nil: the numbers are in Unit, or in pulses
	Numbers       unit.Unit // of the numbers in the payload
	Value, Time   string    // JSON Pointers (RFC 6901), of Samples into each; "" is a bare number, and arrival time
	TimeFormat    string    // "s", "ms", "us", "rfc3339"; "" to tell by shape and magnitude
	UnitAt        string    // JSON Pointer of the name of Numbers, into the message as a whole; "" where it has none
	Quality       *Quality  // nil: the messages tell none
	Samples       *Samples  // nil: a message tells one reading
	Accuracy      Accuracy
	MaxAge        time.Duration // how long a reading is held; default 60 s
	Min, Max      float64       // instrument range, SI, absolute; when absent what no plant has
	QoS           byte          // always 1: each reading is acknowledged when it is on disk

	// Resolution is the step of the tag's numbers, and Deadband how far the quantity may
	// move before its source tells of it; SI, 0 where the file gives none.
	Resolution, Deadband float64
	Counter              *Counter // the tag is a register that only counts up; its Accuracy is a part of what it counts
	// OnChange says that the source reports by exception, and a reading holds as long as
	// the source is alive, which the tag at the index Alive of Site.Tags tells.
	OnChange bool
	Alive    int
	// Metric is set of a tag that reads one of a Sparkplug B namespace in place of a topic.
	Metric *Metric
	Screen *Screen // nil: its readings are not tested
	// Beside is the index of a second sensor of the same quantity, where HasBeside.
	Beside    int
	HasBeside bool
	// Liveness is set of a tag that no load may choose: it stands behind those that the
	// file declares, under the name of its topic or Sparkplug source, one for each.
	Liveness *Liveness
}

// Show writes an SI value in the tag's unit, a gauge pressure as such, with six digits.
func (t *Tag) Show(si float64) string {
	switch {
	case t.Liveness == nil:
	case si > 0:
		return "alive"
	default:
		return "gone"
	}
	if t.Unit.Gauge {
		si -= t.Offset
	}
	return fmt.Sprintf("%.6g %s", t.Unit.Of(si), t.Unit.Symbol)
}

// Holds is how long a reading of the tag holds; 0 where it does as long as its source is
// alive, or until there is another.
func (t *Tag) Holds() time.Duration {
	if t.OnChange && t.Counter == nil || t.MaxAge == untilTold {
		return 0
	}
	return t.MaxAge
}

// Metric is one that an edge node, or with Device a device behind it, publishes by
// Sparkplug B; of a tag of [Liveness] it is the source itself, without a name.
type Metric struct{ Group, Node, Device, Name string }

// Source is the source of the metric, as "group/node" or "group/node/device".
func (m *Metric) Source() string {
	if m.Device == "" {
		return m.Group + "/" + m.Node
	}
	return m.Group + "/" + m.Node + "/" + m.Device
}

// Counter is a register that only counts up, in the SI unit of its tag: m³, kg, mol or J.
type Counter struct {
	Modulus float64 // where it begins again at zero; 0 when the file gives none
	Largest float64 // the rate, a second, above which a difference is a fault; 0 when the file gives none
	Each    bool    // a message tells what has passed since the one before, and no total
}

// Liveness is how a topic tells whether a source is alive: by a heartbeat of any payload,
// or by two words.
type Liveness struct {
	Online, Offline string // "" of a heartbeat
	// Kept says that a message which the broker kept counts, since the last word holds
	// until the next.
	Kept bool
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

// HeatLoad is one heat load, a stream or a vessel, and what it was designed for.
type HeatLoad struct {
	Name       string
	Stream     *Stream // nil of a vessel
	Vessel     *Vessel // nil of a stream
	Witness    Source  // the energy counter of a heat meter in the same circuit; only with HasWitness
	HasWitness bool
	Running    Source // the tag of the pump; only with HasRunning
	HasRunning bool
	Bypass     Source // the tag of a bypass; only with HasBypass
	HasBypass  bool
	Settles    time.Duration // from when the bypass is open until the temperatures are alike
	Design     Design
}

// Fluid is what the load is computed with, and its name in the file.
func (l *HeatLoad) Fluid() (string, thermo.Fluid) {
	if l.Vessel != nil {
		return l.Vessel.FluidName, l.Vessel.Fluid
	}
	return l.Stream.FluidName, l.Stream.Fluid
}

// Sources are all tags and constants that the load reads, its witness, its pump, its bypass and what its expected duty
// goes by too.
func (l *HeatLoad) Sources() []Source {
	var all []Source
	if v := l.Vessel; v != nil {
		all = append(all, v.Temperature, v.Pressure, v.Content)
	} else {
		s := l.Stream
		all = append(all, s.Flow, s.Inlet, s.Outlet, s.Pressure, s.OutletPressure, s.Humidity, s.Coil, s.Pump)
	}
	if l.HasWitness {
		all = append(all, l.Witness)
	}
	if l.HasRunning {
		all = append(all, l.Running)
	}
	if l.HasBypass {
		all = append(all, l.Bypass)
	}
	for _, tag := range l.Design.Drivers() {
		all = append(all, Source{Tag: tag})
	}
	return all
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
	FlowKind                 unit.Dimension // MassFlow, VolumeFlow or MolarFlow, also of a counter
	Inlet, Outlet            Source         // K
	Pressure, OutletPressure Source         // Pa; the outlet's is the inlet's when not given
	MeterAtOutlet            bool           // where a volume flow is metered, or one that is calibrated
	CalibratedAt             float64        // kg/m³ that a meter by differential pressure was reckoned for; 0 for none
	Gives                    bool           // gives heat, and is colder at the outlet; else it takes heat
	BothWays                 bool           // heated at times and cooled at others
	Margin                   float64        // K to saturation below which heat may be latent; default 5, for moist air 1
	IdleBelow                float64        // SI, as the flow; default 0.5 % of the flow tag's range
	// Humidity is that of a gas whose vapour content is measured, at the inlet, in
	// the unit of its kind; HumidityKind is 0 for any other fluid.
	Humidity     Source
	HumidityKind thermo.MoistureKind
	Coil         Source // K, the coldest surface that a moist gas meets; only with HasCoil
	HasCoil      bool
	Pair         float64 // correlation of the errors of inlet and outlet, 0 to 1; default 0
	Corrections
}

// Corrections are what the duty of a stream is corrected for.
type Corrections struct {
	Pump       Source // W, heat of a pump or fan between the thermometers; only with HasPump
	HasPump    bool
	Hold       float64       // m³ between the thermometers, which the fluid passes in plug flow; 0 for none
	Stored     float64       // J/K, heat capacity of what lies between them; 0 for none
	StoredOver time.Duration // span over which its rise is told; default 5 min
}

// Vessel is a closed content whose temperature tells its heat.
type Vessel struct {
	FluidName   string
	Fluid       thermo.Fluid
	Temperature Source // K, a tag
	Pressure    Source // Pa
	Rigid       bool   // a gas that keeps its volume; else the vessel keeps its pressure
	Content     Source
	ContentKind unit.Dimension // Mass or Volume
	Shell       float64        // J/K, heat capacity of the wall; default 0
	Over        time.Duration  // span through which the rate is fitted; default 10 min
	Still       float64        // fraction by which the content may change over it; default 1 %
	Gives       bool           // gives heat; else it takes heat
	IdleBelow   float64        // W; default 0
	Margin      float64        // K to saturation, as of a stream
}

// Design is what a load should move.
type Design struct {
	// Of these there is one at most; a load without has no design.
	Duty      float64 // W; 0 when the file gives none
	Table     *Table
	Week      *[HoursAWeek]float64 // W
	Baseline  *Baseline
	Exchanger string // the name of one, which tells what is expected

	Uncertainty   float64       // relative standard uncertainty of Duty, Table or Week; default 0
	Allow         float64       // fraction of the expected duty
	FalseWarnings float64       // how many a year are put up with; 0 when the file does not say
	Lasting       time.Duration // how long a deviation must stand; default 10 min
	Inlet, Outlet float64       // K; 0 when the file gives none
	Pressure      float64       // Pa, absolute; 0 when the file gives none
}

// Drivers are the tags that what is expected goes by, in their order there.
func (d *Design) Drivers() (tags []int) {
	if d.Table != nil {
		return d.Table.Against
	}
	if d.Baseline != nil {
		for _, t := range d.Baseline.Terms {
			tags = append(tags, t.Tag)
		}
	}
	return tags
}

// Timing is how event time moves.
type Timing struct {
	Grid     time.Duration // step at which loads are computed; default 1 s
	Lateness time.Duration // how long event time waits for stragglers; default 5 s
	Ahead    time.Duration // stamps further in the future are refused; default 30 s
	Commit   time.Duration // between two writes to disk; default 10 s
	Beat     time.Duration // 1 s
	Bridge   time.Duration // longest time without data that is filled by a straight line; default 0, for none
}

// History bounds what is kept on disk.
type History struct {
	MaxAge   time.Duration // default 730 d
	MaxBytes int64         // default 256 MiB
}
