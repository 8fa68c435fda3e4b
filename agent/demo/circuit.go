package demo

import (
	"fmt"
	"math"
	"strings"
	"time"

	"heatreeve/agent/site"
	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// habit is how one load of the plant spends its day. Shares are of its design
// duty; of the two that meet in the exchanger, of its design flow.
type habit struct {
	load   string
	night  float64       // share at night
	swings float64       // amplitude by day, share of the allowance
	period time.Duration // of the swings
	// follows is how the temperature difference follows the duty: 1 where the
	// flow stays as it is, 0 where the flow does all.
	follows float64
	stops   bool // its pump is off for a while
	garbles bool // its outlet transmitter sends garbage for a while
	silent  bool // its outlet transmitter falls silent for a while
}

// habits are the loads of the invented plant, by their names in the site file.
var habits = []habit{
	{load: hotLoad, night: 0.4},
	{load: "chilled-glycol", night: 0.97, swings: 0.3, period: 36 * time.Minute, follows: 0.5, stops: true, garbles: true},
	{load: "dryer-air", night: 0.6, swings: 0.25, period: 60 * time.Minute, follows: 0.2, silent: true},
	{load: coldLoad, night: 0.4, swings: 0.12, period: 48 * time.Minute},
}

// circuit is a load of the site with its habit.
type circuit struct {
	habit
	site.HeatLoad
}

// state is a circuit at one instant, in SI units.
type state struct {
	duty  float64
	parts [partCount]float64 // what its transmitters measure; pressures absolute
}

// findCircuits matches the site's loads with the habits, one to one, and orders
// them as the site does.
func findCircuits(s *site.Site) ([]circuit, error) {
	var circuits []circuit
	for _, l := range s.Loads {
		h, ok := habitOf(l.Name)
		if !ok {
			return nil, fmt.Errorf("site %q: the invented plant has no load %q; it has %s", s.Name, l.Name, knownLoads())
		}
		c := circuit{habit: h, HeatLoad: l}
		if l.Design.Exchanger != "" {
			c.Design.Duty = sideOf(s, len(circuits))
		}
		if err := c.designed(); err != nil {
			return nil, fmt.Errorf("site %q: load %q: %w", s.Name, l.Name, err)
		}
		circuits = append(circuits, c)
	}
	for _, h := range habits {
		if !has(circuits, h.load) {
			return nil, fmt.Errorf("site %q has no load %q; the invented plant needs %s", s.Name, h.load, knownLoads())
		}
	}
	return circuits, nil
}

// sideOf is the design duty of a load by its exchanger, W.
func sideOf(s *site.Site, load int) float64 {
	for _, x := range s.Exchangers {
		switch load {
		case x.Hot:
			return x.Duty
		case x.Cold:
			return x.Duty - x.Loss
		}
	}
	return 0
}

func habitOf(load string) (habit, bool) {
	for _, h := range habits {
		if h.load == load {
			return h, true
		}
	}
	return habit{}, false
}

func has(circuits []circuit, load string) bool {
	for _, c := range circuits {
		if c.Name == load {
			return true
		}
	}
	return false
}

func knownLoads() string {
	var names []string
	for _, h := range habits {
		names = append(names, fmt.Sprintf("%q", h.load))
	}
	return strings.Join(names, ", ")
}

// designed checks that the site tells the design point, which the day is drawn
// around.
func (c *circuit) designed() error {
	if c.Stream == nil {
		return fmt.Errorf("the invented plant needs a stream, not a vessel")
	}
	d, st := c.Design, c.Stream
	_, _, err := c.pressures()
	switch {
	case d.Duty <= 0 || d.Allow <= 0:
		return fmt.Errorf("the invented plant needs its design duty and allowance")
	case d.Inlet <= 0 || d.Outlet <= 0:
		return fmt.Errorf("the invented plant needs its design inlet and outlet")
	case st.Flow.Constant() || st.Inlet.Constant() || st.Outlet.Constant():
		return fmt.Errorf("the invented plant needs tags for flow, inlet and outlet, not constants")
	}
	return err
}

// share is the duty at the time of day t as a share of the design duty, or the flow
// likewise.
func (c *circuit) share(t time.Duration) float64 {
	p := production(t)
	s := c.night + (1-c.night)*p
	if c.swings > 0 {
		s *= 1 + p*c.swings*c.Design.Allow*swing(t, c.period)
	}
	return s
}

// stopped tells whether nothing flows at the time of day t.
func (c *circuit) stopped(t time.Duration) bool { return c.stops && within(t, stopBegins, stopEnds) }

// at is the circuit at the time of day t, where its duty is chosen and its temperatures
// with it. The error is the fluid's *thermo.RangeError.
func (c *circuit) at(t time.Duration) (state, error) {
	share := c.share(t)
	T1 := c.Design.Inlet
	T2 := T1 + (c.Design.Outlet-T1)*math.Pow(share, c.follows)
	duty := share * c.Design.Duty
	if c.stopped(t) {
		duty = 0
	}
	return c.state(duty, T1, T2)
}

// state is the circuit that moves a duty between two temperatures. The flow follows from
//
//	m = Q / |h(outlet) − h(inlet)|
//
// and is turned into what the meter counts with the fluid's density in the
// meter's pipe, or its molar mass. The error is the fluid's *thermo.RangeError.
func (c *circuit) state(duty, T1, T2 float64) (state, error) {
	p1, p2, err := c.pressures()
	if err != nil {
		return state{}, err
	}
	in, err := c.Stream.Fluid.At(T1, p1)
	if err != nil {
		return state{}, fmt.Errorf("inlet: %w", err)
	}
	out, err := c.Stream.Fluid.At(T2, p2)
	if err != nil {
		return state{}, fmt.Errorf("outlet: %w", err)
	}
	flow := c.metered(duty/math.Abs(out.Enthalpy-in.Enthalpy), in, out)
	return state{duty, [...]float64{partFlow: flow, partInlet: T1, partOutlet: T2, partPressure: p1, partOutletPressure: p2}}, nil
}

// metered is the mass flow m in kg/s as the meter counts it.
func (c *circuit) metered(m float64, in, out thermo.Properties) float64 {
	switch {
	case c.Stream.FlowKind == unit.MolarFlow:
		return m / c.Stream.Fluid.MolarMass()
	case c.Stream.FlowKind == unit.VolumeFlow && c.Stream.MeterAtOutlet:
		return m / out.Density
	case c.Stream.FlowKind == unit.VolumeFlow:
		return m / in.Density
	}
	return m
}

// condition is that of one of the circuit's transmitters.
func (c *circuit) condition(p part, t time.Duration) Condition {
	switch {
	case p != partOutlet:
		return Sends
	case c.silent && within(t, silentBegins, silentEnds):
		return Silent
	case c.garbles && within(t, garbleBegins, garbleEnds):
		return Garbled
	}
	return Sends
}

// pressures are the site's constants, or the design pressure where it has tags.
func (c *circuit) pressures() (inlet, outlet float64, err error) {
	ends := [2]float64{}
	for i, s := range [...]site.Source{c.Stream.Pressure, c.Stream.OutletPressure} {
		ends[i] = s.Value
		if !s.Constant() {
			ends[i] = c.Design.Pressure
		}
		if ends[i] <= 0 {
			return 0, 0, fmt.Errorf("the invented plant needs its design pressure")
		}
	}
	return ends[0], ends[1], nil
}
