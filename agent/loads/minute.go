package loads

import (
	"encoding/binary"
	"fmt"
	"math"

	"heatreeve/ingest/quality"
)

// Minute is what a load did in one minute of event time. Means are over the
// measured time, those of temperatures and pressure over the part of it that
// was not idle. A minute that was all missing has no record.
type Minute struct {
	Load              int     // index into [Config.Loads]
	Start             int64   // first instant of the minute
	Measured, Missing int64   // ns
	Idle              int64   // ns, within Measured
	Given, Taken      float64 // J that the stream gave up, and took up, in the measured time
	// Bridged is the time that a straight line fills, ns, and BridgedGiven and
	// BridgedTaken the heat in it, J. Measured, Bridged and Missing add up to the part
	// of the minute that is accounted for.
	Bridged                    int64
	BridgedGiven, BridgedTaken float64
	Latent                     int64 // ns within Measured whose duty is the sensible part only
	Uncertain                  int64 // ns within Measured for which an uncertain reading was used
	// Mark is the worst of those readings', and By the first tag that had it.
	Mark             quality.Mark
	By               string
	Duty             float64 // mean, W, positive in the load's service
	DutyMin, DutyMax float64 // of the grid's figures, W
	Uncertainty      float64 // mean standard uncertainty, W
	// Systematic is the signed contribution of each part to the uncertainty of the
	// measured heat served, J: it adds up over minutes as it stands. Random is the
	// variance by what does not last, J²: it adds up as variances do.
	Systematic Shares
	Random     float64
	// Witness is what the load's witness counted, J, in the spans between two of its
	// readings that ended in this minute and were measured throughout, and Compared the
	// heat that the load served in them.
	Witness, Compared float64
	MassFlow          float64 // kg/s
	Inlet, Outlet     float64 // K
	Pressure          float64 // Pa
	Content           float64 // K, of a vessel, at rest or not
	// Drivers are means over that part of the measured time in which the driver had a value,
	// idle or not, in SI; NaN where it had none, and 0 beyond the load's last.
	Drivers [MaxDrivers]float64
}

// Doubt returns what leaves the mean duty of the measured time open: the standard
// uncertainty by what lasts, W, and the variance by what does not, W²; 0 where nothing
// was measured.
func (m *Minute) Doubt() (lasting, random float64) {
	if m.Measured == 0 {
		return 0, 0
	}
	s := float64(m.Measured) / 1e9
	return math.Sqrt(sumOfSquares(m.Systematic[:])) / s, m.Random / (s * s)
}

// Shares is one number for each [Part].
type Shares [Parts]float64

// GobEncode and GobDecode let a state be read by a program that knows more parts.
func (s Shares) GobEncode() ([]byte, error) { return binary.Append(nil, binary.LittleEndian, s) }

// GobDecode takes the parts that were known when b was written; the others are 0.
func (s *Shares) GobDecode(b []byte) error {
	*s = Shares{}
	if n := len(b) / 8; n*8 != len(b) || n > len(s) {
		return fmt.Errorf("shares of %d bytes: at most %d numbers are known", len(b), len(s))
	}
	_, err := binary.Decode(b, binary.LittleEndian, s[:len(b)/8])
	return err
}

// minuteSum gathers a [Minute]; means are kept as time-weighted sums in units of
// the figure times seconds.
type minuteSum struct {
	Sum    Minute
	Begun  bool
	Driven driven
}

// at makes the sum that of the minute of g.
func (m *minuteSum) at(g int64) *Minute {
	if !m.Begun {
		m.Sum = Minute{Start: floor(g, minute), DutyMin: math.Inf(1), DutyMax: math.Inf(-1)}
		m.Driven = driven{}
		m.Begun = true
	}
	return &m.Sum
}

// miss adds time without a figure.
func (m *minuteSum) miss(g, span int64) { m.at(g).Missing += span }

// bridge adds time that a straight line fills, with its heat, positive where it was
// given up.
func (m *minuteSum) bridge(heat float64, g, span int64) {
	s := m.at(g)
	s.Bridged += span
	if heat >= 0 {
		s.BridgedGiven += heat
	} else {
		s.BridgedTaken -= heat
	}
}

// measure adds a figure over [g, g+span).
func (m *minuteSum) measure(f *Figure, g, span int64, t *terms) {
	s := m.at(g)
	if t.drivers > 0 {
		m.Driven.take(&f.Drivers, t.drivers, span)
	}
	dt := float64(span) / 1e9
	s.Measured += span
	s.Duty += f.Duty * dt
	if heat := givenUp(f.Duty*dt, t.gives); heat >= 0 {
		s.Given += heat
	} else {
		s.Taken -= heat
	}
	s.DutyMin, s.DutyMax = min(s.DutyMin, f.Duty), max(s.DutyMax, f.Duty)
	s.Content += f.Content * dt
	s.Random += f.Variance * dt
	if f.uncertain() {
		s.Uncertain += span
		s.doubt(f.Mark, f.By)
	}
	if f.Idle {
		s.Idle += span
		return
	}
	if f.Latent {
		s.Latent += span
	}
	s.Uncertainty += f.Uncertainty * dt
	for p := range s.Systematic {
		s.Systematic[p] += f.Share[p] * dt
	}
	s.MassFlow += f.MassFlow * dt
	s.Inlet += f.Inlet * dt
	s.Outlet += f.Outlet * dt
	s.Pressure += f.Pressure * dt
}

// doubt takes in the mark of a tag's reading.
func (m *Minute) doubt(mark quality.Mark, by string) {
	if worst := quality.Worse(m.Mark, mark); worst != m.Mark {
		m.Mark, m.By = worst, by
	}
}

// add adds a part of the minute, that of g, which was summed for one unit of flow a
// second where the flow was rate.
func (m *minuteSum) add(p *minuteSum, g int64, rate float64, t *terms) {
	s, o := m.at(g), &p.Sum
	if t.drivers > 0 {
		m.Driven.add(&p.Driven, t.drivers)
	}
	s.Measured += o.Measured
	s.Idle += o.Idle
	s.Bridged += o.Bridged
	s.Missing += o.Missing
	s.Latent += o.Latent
	s.Uncertain += o.Uncertain
	s.doubt(o.Mark, o.By)
	s.Given += o.Given * rate
	s.Taken += o.Taken * rate
	s.BridgedGiven += o.BridgedGiven * rate
	s.BridgedTaken += o.BridgedTaken * rate
	s.Duty += o.Duty * rate
	if o.Measured > 0 {
		s.DutyMin, s.DutyMax = min(s.DutyMin, o.DutyMin*rate), max(s.DutyMax, o.DutyMax*rate)
	}
	s.Uncertainty += o.Uncertainty * rate
	for p := range s.Systematic {
		s.Systematic[p] += o.Systematic[p] * rate
	}
	s.Random += o.Random * rate * rate
	s.MassFlow += o.MassFlow * rate
	s.Inlet += o.Inlet
	s.Outlet += o.Outlet
	s.Pressure += o.Pressure
	s.Content += o.Content
}

// close returns the finished minute and starts afresh; false where nothing of it
// was measured or bridged.
func (m *minuteSum) close(t *terms) (Minute, bool) {
	s := m.Sum
	m.Begun = false
	s.Load = t.load
	if t.drivers > 0 {
		s.Drivers = m.Driven.means(t.drivers)
	}
	if s.Measured == 0 {
		s.DutyMin, s.DutyMax = 0, 0
		return s, s.Bridged > 0
	}
	measured := float64(s.Measured) / 1e9
	s.Duty /= measured
	s.Uncertainty /= measured
	s.MassFlow /= measured
	s.Content /= measured
	if flowing := float64(s.Measured-s.Idle) / 1e9; flowing > 0 {
		s.Inlet /= flowing
		s.Outlet /= flowing
		s.Pressure /= flowing
	}
	return s, true
}
