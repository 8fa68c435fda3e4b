package loads

import (
	"fmt"
	"math"
)

// held is the newest reading of a tag that event time has passed.
type held struct {
	At    int64
	Value float64
	Has   bool
}

// evaluate works the figure of load l at the grid point g from the values held
// then. It depends on nothing else.
func (e *Engine) evaluate(l *Load, g int64) Figure {
	s := &l.Stream
	f := Figure{At: g, Until: math.MaxInt64}
	var x state
	var u [PartCp]float64
	if !e.read(&f, s.Flow, &x.flow, &u[PartFlow]) {
		return f
	}
	if x.flow == 0 || math.Abs(x.flow) <= s.IdleBelow {
		f.Idle = true
		return f
	}
	if x.flow < 0 {
		return f.fail(Reverse, fmt.Sprintf("flow is %.4g of its SI unit, below zero by more than idle_below", x.flow))
	}
	ok := e.read(&f, s.Inlet, &x.inlet, &u[PartInlet]) &&
		e.read(&f, s.Outlet, &x.outlet, &u[PartOutlet]) &&
		e.read(&f, s.Pressure, &x.pressure, &u[PartPressure]) &&
		e.read(&f, s.OutletPressure, &x.outletPressure, &u[PartOutletPressure])
	if !ok {
		return f
	}
	if s.OutletPressure == s.Pressure {
		u[PartOutletPressure] = 0 // moves with the inlet's
	}
	return s.figure(f, x, u)
}

// largestMassFlow, kg/s, is beyond any pipe: what gives more is no flow but the
// absurd number of a transmitter without a signal, and would spoil the registers.
const largestMassFlow = 1e6

func (s *Stream) figure(f Figure, x state, u [PartCp]float64) Figure {
	if why, near := s.saturated(x); near {
		return f.fail(Saturation, why)
	}
	r, err := s.heat(x)
	if err != nil {
		return f.fail(OutOfRange, err.Error())
	}
	if err := s.spread(&f, x, u, r); err != nil {
		return f.fail(OutOfRange, err.Error())
	}
	if !(r.mass <= largestMassFlow) {
		return f.fail(OutOfRange, fmt.Sprintf("mass flow of %g kg/s is more than any pipe carries", r.mass))
	}
	f.Duty, f.MassFlow, f.Density = r.duty, r.mass, r.density
	f.Inlet, f.Outlet, f.Pressure = x.inlet, x.outlet, x.pressure
	return f
}

func (f Figure) fail(why Fault, reason string) Figure {
	return Figure{At: f.At, Until: f.Until, Fault: why, Reason: reason}
}

// read puts the value of src and its standard uncertainty in place; it marks f
// and returns false where there is none to use.
func (e *Engine) read(f *Figure, src Source, value, u *float64) bool {
	if src.Tag < 0 {
		*value, *u = src.Value, 0
		return true
	}
	tag, h := &e.cfg.Tags[src.Tag], &e.tags[src.Tag].Held
	switch {
	case !h.Has:
		*f = f.fail(NoReading, fmt.Sprintf("tag %q has sent nothing yet", tag.Name))
		return false
	case f.At-h.At >= tag.MaxAge:
		*f = f.fail(Stale, fmt.Sprintf("tag %q: last reading is older than its max_age of %g s", tag.Name, float64(tag.MaxAge)/1e9))
		return false
	}
	*value, *u = h.Value, tag.Accuracy.Standard(h.Value)
	f.Until = min(f.Until, h.At+tag.MaxAge)
	return true
}
