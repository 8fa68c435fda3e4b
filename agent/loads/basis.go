package loads

// steps are what the figure of a stream is worked from, and what comes on the way.
type steps struct {
	x     State
	d     [PartCp]doubt
	c     [PartCp]float64 // change of the duty by a unit of each input
	r     Result
	lines [2]line // of inlet and outlet, where what is stored is corrected for
	uRise float64 // standard uncertainty of x.Rise
	again bool    // what leaves the hold at x.Inlet is known from the first time
}

// vesselSteps are those of a vessel.
type vesselSteps struct {
	x      inside
	d      insideDoubt
	h      heated
	line   line
	amount float64    // change of the duty by a unit of the content
	about  [4]float64 // what the share of the content is the root of the sum of squares of
}

// Basis is what the present figure of a load was worked from, and what came on the way, so
// that its working can be told. All is SI. Where the figure is a fault, only the inputs
// mean anything; where it is idle, what is not looked at then is zero.
type Basis struct {
	Grid   int64  // step of the grid, ns
	Figure Figure // as [LoadState] has it
	Inputs []Input
	Count  Count // where the flow is counted
	Stream *StreamBasis
	Vessel *VesselBasis
}

// Input is one of what a figure needs.
type Input struct {
	Name   string // flow, inlet, outlet, pressure, outlet pressure, humidity, coil, pump, temperature or content
	Part   Part   // whose share of the uncertainty is its, but for that of a coil
	Source Source
	Held   Reading // the newest reading that event time has passed; At is 0 where there is none
	// Aside says that newer readings were set aside, the newest of them at Held.At, and that
	// Held has the value from before them.
	Aside  bool
	Alive  Reading // the same of the tag that tells whether the source is alive, where it has one
	Fault  Fault   // why what is held cannot be used
	Reason string
	// Accuracy is the standard uncertainty by the accuracy, Coarse the variance by step and
	// dead band of the numbers, Scatter that by what changes from reading to reading.
	Accuracy, Coarse, Scatter float64
	By                        float64 // change of the duty by a unit of it, W
}

// Count is what the counter of a flow has told: that Amount passed in [From, To), on the
// grid, between the counts Before and Value.
type Count struct {
	Counted       bool // the flow is
	Known         bool // the amount is
	Why           string
	From, To      int64
	Before, Value float64
	Amount        float64
}

// StreamBasis is what the heat equation of a stream took and gave. Where the flow is
// counted, all is for the mean flow between the last two counts.
type StreamBasis struct {
	State
	Result
	MolarMass      float64 // of what flows, kg/mol
	Pair           float64 // correlation of the thermometers' errors
	InletRate      Rate    // where what is stored is corrected for
	OutletRate     Rate
	RiseError      float64 // standard uncertainty of State.Rise, K/s
	Correction     float64 // what the corrections add to the duty, W
	ByFlow         float64 // duty without corrections, W
	PropertyShares Shares  // of the figure's shares those by the fluid's own figures
}

// VesselBasis is what the heat equation of a vessel took and gave.
type VesselBasis struct {
	Temperature, Mean float64 // of the content now, and over the span of the rate, K
	Pressure, Content float64
	Rate              Rate
	Mass, Density     float64 // Density is 0 where the content is by mass
	Specific          float64 // specific heat at the mean temperature, J/(kg K)
	Capacity          float64 // of content and shell, J/K
	Duty              float64 // before rest is told from it, W
	ByContent         float64 // the part of the duty that goes with the content, W
	// What the share of the content is the root of the sum of squares of, W.
	ByState, ByAmount, ByShell, ByGain float64
	ByCp                               float64 // what of the duty goes with cp, W
}

// Rate is a slope through the readings of a span.
type Rate struct {
	Points int
	Span   float64 // from the first point to the last, s
	Slope  float64 // K/s
	Error  float64 // its standard uncertainty, K/s
	// Scatter is the part of Error that the scatter about the line tells.
	Scatter float64
}

// Basis works the present figure of a load once more, by the equations that gave it, and
// returns what they took and gave.
func (e *Engine) Basis(load int) Basis {
	l := &e.loads[load]
	b := Basis{Grid: e.cfg.Grid, Figure: e.live(load)}
	if l.figure.At == 0 {
		b.Figure.Fault, b.Figure.Reason = NoReading, "no reading yet"
		return b
	}
	if e.cfg.Loads[load].Vessel != nil {
		e.vesselBasis(&b, load)
		return b
	}
	if l.Counted != nil {
		c := &e.tags[l.terms.counter].Count
		b.Count = Count{true, c.Known, c.Why, c.From, c.To, c.Before, c.Value, c.Amount}
	}
	e.streamBasis(&b, load)
	return b
}

func (e *Engine) streamBasis(b *Basis, load int) {
	q, g := &e.equations[load], e.loads[load].figure.At
	b.add(e, g, "flow", PartFlow, q.Flow)
	b.add(e, g, "inlet", PartInlet, q.Inlet)
	b.add(e, g, "outlet", PartOutlet, q.Outlet)
	b.add(e, g, "pressure", PartPressure, q.Pressure)
	if q.OutletPressure != q.Pressure {
		b.add(e, g, "outlet pressure", PartOutletPressure, q.OutletPressure)
	}
	if q.HumidityKind != 0 {
		b.add(e, g, "humidity", PartHumidity, q.Humidity)
	}
	if q.HasCoil {
		b.add(e, g, "coil", Parts, q.Coil)
	}
	if q.HasPump {
		b.add(e, g, "pump", PartPump, q.Pump)
	}
	if !b.Figure.Measured() || b.Figure.Idle {
		return
	}
	s := steps{again: true}
	var f Figure
	if e.stream(load, g, &f, &s); !f.Measured() || f.Idle {
		return
	}
	rate := 1.0
	if b.Count.Counted {
		rate = e.tags[e.loads[load].terms.counter].Count.rate()
	}
	for i := range b.Inputs {
		if in := &b.Inputs[i]; in.Part < PartCp {
			in.By = s.c[in.Part] * rate
		}
	}
	if b.Count.Counted { // an error of the flow moves the duty by as much whatever the flow
		b.Inputs[0].By, b.Inputs[0].Accuracy = s.c[PartFlow], s.d[PartFlow].accuracy*rate
		b.Inputs[0].Coarse, b.Inputs[0].Scatter = 0, 0
	}
	b.Stream = q.basis(&s, rate, e.cfg.Tags)
	if m, err := q.medium(&s.x); err == nil {
		b.Stream.MolarMass = m.MolarMass()
	}
	for p := PartCp; p < Parts; p++ {
		b.Stream.PropertyShares[p] = b.Figure.Share[p]
	}
}

// basis tells of what s did at one unit of flow what it is at rate, where the flow is
// counted.
func (q *equation) basis(s *steps, rate float64, tags []Tag) *StreamBasis {
	b := &StreamBasis{State: s.x, Result: s.r, Pair: q.Pair, RiseError: s.uRise}
	b.Flow, b.MassFlow, b.Duty = b.Flow*rate, b.MassFlow*rate, b.Duty*rate
	b.Correction = q.correction(&s.x)
	b.ByFlow = b.Duty - b.Correction
	if q.Stored > 0 {
		for i, to := range [...]*Rate{ofInlet: &b.InletRate, ofOutlet: &b.OutletRate} {
			if src := [...]Source{ofInlet: q.Inlet, ofOutlet: q.Outlet}[i]; src.Tag >= 0 {
				*to = s.lines[i].told(&tags[src.Tag])
			}
		}
	}
	return b
}

func (l *line) told(t *Tag) Rate {
	return Rate{Points: l.Points, Span: l.Span, Slope: l.Rate, Error: l.uncertainty(t), Scatter: l.Error}
}

func (e *Engine) vesselBasis(b *Basis, load int) {
	v, g := e.cfg.Loads[load].Vessel, e.loads[load].figure.At
	b.add(e, g, "temperature", PartContent, v.Temperature)
	b.add(e, g, "pressure", PartPressure, v.Pressure)
	b.add(e, g, "content", PartContent, v.Content)
	var s vesselSteps
	if !b.Figure.Measured() {
		return
	}
	if f := e.vessel(load, g, &s); !f.Measured() {
		return
	}
	x, h := &s.x, &s.h
	b.Inputs[2].By = s.amount
	b.Vessel = &VesselBasis{
		Temperature: x.T, Mean: x.Mean, Pressure: x.Pressure, Content: x.Content,
		Rate: s.line.told(&e.cfg.Tags[v.Temperature.Tag]),
		Mass: h.Mass, Density: h.Density, Specific: h.Specific, Capacity: h.Capacity, Duty: h.Duty,
		ByContent: h.ByContent, ByCp: h.ByCp,
		ByState: s.about[0], ByAmount: s.about[1], ByShell: s.about[2], ByGain: s.about[3],
	}
}

// add adds an input with what is held of it at g.
func (b *Basis) add(e *Engine, g int64, name string, part Part, src Source) {
	in := Input{Name: name, Part: part, Source: src}
	f := Figure{At: g}
	var d doubt
	var value float64
	if !e.read(&f, src, &value, &d) {
		in.Fault, in.Reason = f.Fault, f.Reason
	}
	in.Accuracy, in.Coarse, in.Scatter = d.accuracy, d.coarse, d.scatter
	if src.Tag >= 0 {
		in.Held, in.Aside = e.heldReading(src.Tag), e.tags[src.Tag].Held.Aside
		if tag := &e.cfg.Tags[src.Tag]; tag.OnChange {
			in.Alive = e.heldReading(tag.Alive)
		}
	}
	b.Inputs = append(b.Inputs, in)
}

func (e *Engine) heldReading(tag int) Reading {
	h := &e.tags[tag].Held
	if !h.Has {
		return Reading{Tag: tag}
	}
	return Reading{Tag: tag, At: h.At, Value: h.Value, Mark: h.Mark}
}
