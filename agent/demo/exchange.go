package demo

import (
	"fmt"
	"math"
	"time"
)

// The exchanger of the invented plant: pressurised hot water heats milk, and the milk
// leaves a film on the plates.
const (
	hotLoad  = "hot-water"
	coldLoad = "milk"
)

// Films of plates in turbulent flow, and how their resistance is shared out: common
// practice, no source.
const (
	filmExponent = 0.7
	hotFilm      = 0.4
	coldFilm     = 0.5
)

// exchange is the exchanger with the two circuits that meet in it.
type exchange struct {
	plates
	sides [2]int  // places in the circuits
	film  float64 // resistance of what settles until the duty is off by the allowance, K/W
}

// newExchange sizes the plates for the design points of both loads. What the hot side
// gives beyond what the cold side takes is lost to the room.
func newExchange(circuits []circuit) (*exchange, error) {
	x := &exchange{plates: plates{films: [2]float64{hotFilm, coldFilm}, exponent: filmExponent}}
	for i := range circuits {
		switch circuits[i].Name {
		case hotLoad:
			x.sides[hotSide] = i
		case coldLoad:
			x.sides[coldSide] = i
		}
	}
	hot, cold := &circuits[x.sides[hotSide]], &circuits[x.sides[coldSide]]
	if x.loss = hot.Design.Duty - cold.Design.Duty; x.loss < 0 {
		return nil, fmt.Errorf("load %q takes more by design than %q gives", coldLoad, hotLoad)
	}
	var err error
	for side, i := range x.sides {
		if x.flows[side], err = circuits[i].designFlow(); err != nil {
			return nil, fmt.Errorf("load %q: %w", circuits[i].Name, err)
		}
	}
	return x, x.size(hot, cold)
}

// size finds the conductance that makes the design point, and the film that costs the
// allowance there.
func (x *exchange) size(hot, cold *circuit) error {
	in := x.streams(hot, cold, x.flows)
	of := func(conductance, settled float64) (float64, error) {
		p := x.plates
		p.conductance = conductance
		heat, _, err := p.passed(in, settled)
		return heat, err
	}
	first, err := conductanceFor(cold.Design.Duty, hot.Design.Inlet, hot.Design.Outlet, cold.Design.Inlet, cold.Design.Outlet)
	if err != nil {
		return err
	}
	x.conductance, err = root(first/2, 2*first, func(c float64) (float64, error) {
		heat, err := of(c, 0)
		return heat - cold.Design.Duty, err
	})
	if err != nil {
		return err
	}
	fouled := hot.Design.Duty*(1-hot.Design.Allow) - x.loss
	x.film, err = root(0, 1/x.conductance, func(settled float64) (float64, error) {
		heat, err := of(x.conductance, settled)
		return fouled - heat, err
	})
	return err
}

// root halves an interval in which f rises through zero.
func root(from, to float64, f func(float64) (float64, error)) (float64, error) {
	for range 60 {
		middle := (from + to) / 2
		y, err := f(middle)
		if err != nil {
			return 0, err
		}
		if y < 0 {
			from = middle
		} else {
			to = middle
		}
	}
	return (from + to) / 2, nil
}

// streams are both circuits as they come to the plates, from their design inlets.
func (x *exchange) streams(hot, cold *circuit, flows [2]float64) [2]incoming {
	return [2]incoming{
		{flows[hotSide], hot.Design.Inlet, hot.enthalpy},
		{flows[coldSide], cold.Design.Inlet, cold.enthalpy},
	}
}

// at is both circuits at the time of day t. Production sets both flows; the duty and the
// outlets follow from what the plates pass.
func (x *exchange) at(circuits []circuit, t time.Duration) (states [2]state, err error) {
	var flows [2]float64
	for side, i := range x.sides {
		flows[side] = x.flows[side] * circuits[i].share(t)
	}
	hot, cold := &circuits[x.sides[hotSide]], &circuits[x.sides[coldSide]]
	heat, outlets, err := x.passed(x.streams(hot, cold, flows), x.film*fouling(t))
	if err != nil {
		return states, fmt.Errorf("loads %q and %q: %w", hotLoad, coldLoad, err)
	}
	for side, c := range [...]*circuit{hot, cold} {
		duty := heat
		if side == hotSide {
			duty += x.loss
		}
		if states[side], err = c.state(duty, c.Design.Inlet, outlets[side]); err != nil {
			return states, fmt.Errorf("load %q: %w", c.Name, err)
		}
	}
	return states, nil
}

// designFlow is the mass flow of a circuit at its design point, kg/s.
func (c *circuit) designFlow() (float64, error) {
	h1, err := c.enthalpy(c.Design.Inlet)
	if err != nil {
		return 0, fmt.Errorf("inlet: %w", err)
	}
	h2, err := c.enthalpy(c.Design.Outlet)
	if err != nil {
		return 0, fmt.Errorf("outlet: %w", err)
	}
	return c.Design.Duty / math.Abs(h2-h1), nil
}

// enthalpy is that of the circuit's fluid at its inlet's pressure, J/kg.
func (c *circuit) enthalpy(T float64) (float64, error) {
	p, _, err := c.pressures()
	if err != nil {
		return 0, err
	}
	x, err := c.Stream.Fluid.At(T, p)
	return x.Enthalpy, err
}
