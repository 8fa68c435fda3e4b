package demo

import (
	"fmt"
	"math"
	"math/rand/v2"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/site"
)

// Scenario is what goes wrong with the exchanger of the plant or with its instruments.
// The plant runs by day and night alike in it. Sides are 0 of hot water and 1 of milk.
type Scenario struct {
	Name string
	// Begins is when it goes wrong, since the start.
	Begins time.Duration
	// FoulsIn is how long it takes until a film has cost a tenth of the conductance, growing
	// evenly; 0 for no film.
	FoulsIn time.Duration
	Flow    [2]float64 // by how much a flow meter reads high, as a fraction
	Inlet   [2]float64 // by how much a thermometer does, K
	Outlet  [2]float64
	Swapped bool // the thermometers of the hot side have changed places
	Stops   bool // both pumps rest for an hour in six
	Sways   bool // production goes up and down by a quarter, within 40 minutes
	// Surplus is by how much more hot water than by design is sent round, as a fraction, of
	// which a part Bypass passes by the plates.
	Surplus, Bypass float64
}

// Truth is what no instrument tells.
type Truth struct {
	Lost float64 // of the clean conductance at these flows, as a fraction
	Duty [2]float64
}

// Trial is one course of a scenario, minute by minute.
type Trial struct {
	scenario Scenario
	plates   plates
	liquids  [2]liquid
	inlets   [2]float64
	gauges   [2]gauges
	chance   *rand.Rand
	swings   [4]float64 // autoregressions: of both flows and of both inlets, in standard deviations
	minute   int
}

// gauges are the instruments of one side.
type gauges struct {
	flow, inlet, outlet, cp gauge // flow and cp as fractions, the others in K
}

// gauge is one instrument: its standard uncertainty by its accuracy, the error that this one
// has, and the standard deviation of the scatter of a minute's mean.
type gauge struct{ u, error, scatter float64 }

// How the plant and its readings move: common practice, no source. Each swing is an
// autoregression that has forgotten all but 1/e after half an hour.
const (
	swingMinutes = 30
	flowSwing    = 0.01 // standard deviation, fraction of the flow
	inletSwing   = 0.3  // K
	flowScatter  = 0.003
	inletScatter = 0.03 // K
	cleanError   = 0.02 // standard uncertainty of the conductance that the data sheet states
)

// NewTrial returns a course of the scenario with instruments drawn at random within the
// accuracies that the site states, and with plates whose clean conductance is as near to that
// of the data sheet: an error is even within its half-width.
func (p *Plant) NewTrial(s Scenario, seed uint64) (*Trial, error) {
	t := &Trial{scenario: s, plates: p.exchange.plates, chance: rand.New(rand.NewPCG(seed, noiseKey(0, s.Name)))}
	for side, i := range p.exchange.sides {
		c := &p.circuits[i]
		t.inlets[side] = c.Design.Inlet
		l, err := liquidOf(c)
		if err != nil {
			return nil, fmt.Errorf("load %q: %w", c.Name, err)
		}
		t.liquids[side] = l
		t.gauges[side] = t.draw(p.site, c)
	}
	t.plates.conductance *= 1 + math.Sqrt(3)*cleanError*(2*t.chance.Float64()-1)
	for i := range t.swings {
		t.swings[i] = t.chance.NormFloat64()
	}
	return t, nil
}

// draw returns instruments of a circuit.
func (t *Trial) draw(s *site.Site, c *circuit) gauges {
	drawn := func(u, scatter float64) gauge {
		return gauge{u, math.Sqrt(3) * u * (2*t.chance.Float64() - 1), scatter}
	}
	thermometer := func(src site.Source, T float64) gauge {
		return drawn(s.Tags[src.Tag].Accuracy.HalfWidth(T)/math.Sqrt(3), inletScatter)
	}
	d, st := c.Design, c.Stream
	p, _, _ := c.pressures() // they were found before
	cp, density := st.Fluid.Uncertainty((d.Inlet+d.Outlet)/2, p)
	meter := s.Tags[st.Flow.Tag].Accuracy.HalfWidth(1) / math.Sqrt(3)
	return gauges{
		flow:   drawn(math.Hypot(meter, density), flowScatter),
		inlet:  thermometer(st.Inlet, d.Inlet),
		outlet: thermometer(st.Outlet, d.Outlet),
		cp:     drawn(cp, 0),
	}
}

// Next is the next minute of both sides, and the truth behind it.
func (t *Trial) Next() (minutes [2]design.Minute, truth Truth, err error) {
	at := time.Duration(t.minute) * time.Minute
	t.minute++
	t.swing()
	for side := range minutes {
		minutes[side].Start = int64(at)
	}
	if t.scenario.Stops && at >= t.scenario.Begins && (at-t.scenario.Begins)%(6*time.Hour) < time.Hour {
		for side := range minutes {
			minutes[side].Idle = true
			minutes[side].Inlet, minutes[side].Outlet = t.inlets[side], t.inlets[side]
		}
		return minutes, truth, nil
	}
	return t.run(at, minutes)
}

// swing moves the plant on by a minute.
func (t *Trial) swing() {
	keep := math.Exp(-1.0 / swingMinutes)
	for i := range t.swings {
		t.swings[i] = keep*t.swings[i] + math.Sqrt(1-keep*keep)*t.chance.NormFloat64()
	}
}

// run is a minute in which both sides flow.
func (t *Trial) run(at time.Duration, minutes [2]design.Minute) ([2]design.Minute, Truth, error) {
	wrong := at >= t.scenario.Begins
	var in [2]incoming
	for side := range in {
		in[side] = incoming{
			flow:     t.plates.flows[side] * (1 + flowSwing*t.swings[side]),
			inlet:    t.inlets[side] + inletSwing*t.swings[2+side],
			enthalpy: t.liquids[side].enthalpy,
		}
		if wrong && t.scenario.Sways {
			in[side].flow *= 1 + 0.25*swing(at, 40*time.Minute)
		}
	}
	total, bypass := in[hotSide].flow, 0.0
	if wrong {
		total *= 1 + t.scenario.Surplus
		bypass = t.scenario.Bypass
		in[hotSide].flow = total * (1 - bypass)
	}
	clean := t.plates.clean([2]float64{in[hotSide].flow, in[coldSide].flow})
	settled := t.settled(at)
	heat, outlets, err := t.plates.passed(in, settled)
	if err != nil {
		return minutes, Truth{}, err
	}
	truth := Truth{Lost: 1 - 1/(1+clean*settled), Duty: [2]float64{heat + t.plates.loss, heat}}
	outlets[hotSide] += bypass * (in[hotSide].inlet - outlets[hotSide])
	flows := [2]float64{total, in[coldSide].flow}
	for side := range minutes {
		t.measure(&minutes[side], side, wrong, flows[side], in[side].inlet, outlets[side])
	}
	return minutes, truth, nil
}

// settled is the resistance of the film, K/W: after the time told the conductance at the
// design flows is nine tenths of the clean one.
func (t *Trial) settled(at time.Duration) float64 {
	if t.scenario.FoulsIn == 0 || at < t.scenario.Begins {
		return 0
	}
	return float64(at-t.scenario.Begins) / float64(t.scenario.FoulsIn) / 9 / t.plates.conductance
}

// measure fills in what the instruments tell of a minute.
func (t *Trial) measure(m *design.Minute, side int, wrong bool, flow, inlet, outlet float64) {
	g, s := &t.gauges[side], &t.scenario
	reads := func(g *gauge) float64 { return g.error + g.scatter*t.chance.NormFloat64() }
	flow *= 1 + reads(&g.flow)
	inlet += reads(&g.inlet)
	outlet += reads(&g.outlet)
	if wrong {
		flow *= 1 + s.Flow[side]
		inlet, outlet = inlet+s.Inlet[side], outlet+s.Outlet[side]
		if s.Swapped && side == hotSide {
			inlet, outlet = outlet, inlet
		}
	}
	l := &t.liquids[side]
	h1, _ := l.enthalpy(inlet)
	h2, _ := l.enthalpy(outlet)
	duty := flow * (h2 - h1) * (1 + g.cp.error)
	if side == hotSide {
		duty = -duty
	}
	rate := 0.0
	if inlet != outlet {
		rate = math.Abs(duty / (inlet - outlet))
	}
	*m = design.Minute{
		Start: m.Start, Whole: true, Duty: duty, Flow: flow, Inlet: inlet, Outlet: outlet,
		FlowError: g.flow.u * flow, InletError: g.inlet.u, OutletError: g.outlet.u, CpError: g.cp.u,
		Uncertainty: math.Hypot(math.Abs(duty)*math.Hypot(g.flow.u, g.cp.u), rate*math.Hypot(g.inlet.u, g.outlet.u)),
		Random:      square(duty*g.flow.scatter) + square(rate*g.inlet.scatter) + square(rate*g.outlet.scatter),
	}
}

func square(x float64) float64 { return x * x }

// liquid is the enthalpy of a circuit's fluid as a parabola through the inlet, the outlet and
// the middle of its design: within some parts in 10⁵ of the fluid's own, at a hundredth of the
// time.
type liquid struct{ base, a, b float64 } // K, J/(kg K), J/(kg K²)

func liquidOf(c *circuit) (liquid, error) {
	d := c.Design
	middle := (d.Inlet + d.Outlet) / 2
	var h [3]float64
	for i, T := range [...]float64{d.Inlet, middle, d.Outlet} {
		var err error
		if h[i], err = c.enthalpy(T); err != nil {
			return liquid{}, err
		}
	}
	half := middle - d.Inlet
	return liquid{middle, (h[2] - h[0]) / (2 * half), (h[2] - 2*h[1] + h[0]) / (2 * half * half)}, nil
}

func (l *liquid) enthalpy(T float64) (float64, error) {
	x := T - l.base
	return x * (l.a + l.b*x), nil
}
