package loads

import (
	"fmt"
	"math"

	"heatreeve/ingest/quality"
)

// held is the newest reading of a tag that event time has passed.
type held struct {
	At    int64
	Value float64
	Has   bool
	Mark  quality.Mark
	Aside bool // newer readings were set aside, the newest of them at At
}

// bad reports whether the reading says that there is no value.
func (h *held) bad() bool { return h.Mark.Quality() == quality.Bad }

// evaluate works the figure of a load at the grid point g from the values held
// then. It depends on nothing else.
func (e *Engine) evaluate(load int, g int64, f *Figure) {
	if e.cfg.Loads[load].Vessel != nil {
		*f = e.vessel(load, g, new(vesselSteps))
	} else {
		e.stream(load, g, f, new(steps))
	}
}

// stream is evaluate for a stream; s is left with what the figure was worked from, as far as
// it came.
func (e *Engine) stream(load int, g int64, f *Figure, s *steps) {
	q := &e.equations[load]
	*f = Figure{At: g, Until: math.MaxInt64}
	x, d := &s.x, &s.d
	if !e.flow(load, f, &x.Flow, &d[PartFlow]) {
		return
	}
	if e.loads[load].Counted == nil && q.idle(x.Flow) {
		f.Idle = true
		return
	}
	e.pumped(load, f, s)
	if x.Flow < 0 {
		*f = f.fail(Reverse, fmt.Sprintf("flow is %.4g of its SI unit, below zero by more than idle_below", x.Flow))
		return
	}
	ok := e.read(f, q.Inlet, &x.Inlet, &d[PartInlet]) &&
		e.read(f, q.Outlet, &x.Outlet, &d[PartOutlet]) &&
		e.read(f, q.Pressure, &x.Pressure, &d[PartPressure]) &&
		e.read(f, q.OutletPressure, &x.OutletPressure, &d[PartOutletPressure]) &&
		(q.HumidityKind == 0 || e.read(f, q.Humidity, &x.Humidity, &d[PartHumidity])) &&
		(!q.HasCoil || e.read(f, q.Coil, &x.Coil, new(doubt))) &&
		(!q.HasPump || e.read(f, q.Pump, &x.Pump, &d[PartPump])) &&
		e.delay(load, f, s)
	if !ok || !e.rise(load, f, s) {
		return
	}
	if q.OutletPressure == q.Pressure {
		d[PartOutletPressure] = doubt{} // moves with the inlet's
	}
	q.figure(f, s)
	q.storedSpread(f, s)
	e.order(load, f, s)
	e.alike(load, f, s)
}

// idle reports whether nothing is taken to flow.
func (q *equation) idle(flow float64) bool { return flow == 0 || math.Abs(flow) <= q.IdleBelow }

func (q *equation) figure(f *Figure, s *steps) {
	x := &s.x
	m, err := q.medium(x)
	if err != nil {
		*f = f.fail(OutOfRange, err.Error())
		return
	}
	why, remark := q.phase(&m, x)
	if why != "" {
		*f = f.fail(Saturation, why)
		return
	}
	r := &s.r
	if *r, err = q.work(&m, x); err != nil {
		*f = f.fail(OutOfRange, err.Error())
		return
	}
	if err := q.spread(f, &m, s); err != nil {
		*f = f.fail(OutOfRange, err.Error())
		return
	}
	f.Duty = r.Duty + 0 // never -0: a saved state keeps no sign of it
	f.MassFlow, f.Density, f.Remark = r.MassFlow, r.Density, remark
	f.Inlet, f.Outlet, f.Pressure = x.Inlet, x.Outlet, x.Pressure
}

func (f Figure) fail(why Fault, reason string) Figure {
	return Figure{At: f.At, Until: f.Until, Fault: why, Reason: reason}
}

// read puts the value of src and what may be wrong with it in place; it marks f
// and returns false where there is none to use.
func (e *Engine) read(f *Figure, src Source, value *float64, d *doubt) bool {
	if src.Tag < 0 {
		*value, *d = src.Value, doubt{}
		return true
	}
	tag, h := &e.cfg.Tags[src.Tag], &e.tags[src.Tag].Held
	switch {
	case !h.Has:
		*f = f.fail(NoReading, fmt.Sprintf("tag %q has no reading yet", tag.Name))
		return false
	case tag.OnChange:
		if s := e.standing(src.Tag, f.At); s != holds {
			*f = f.fail(e.unusable(src.Tag, s))
			return false
		}
	case f.At-h.At >= tag.MaxAge:
		*f = f.fail(Stale, fmt.Sprintf("tag %q: last reading is older than its max_age of %g s", tag.Name, float64(tag.MaxAge)/1e9))
		return false
	}
	if !tag.OnChange {
		f.Until = min(f.Until, after(h.At, tag.MaxAge))
	}
	if tag.Counter == nil {
		f.mark(h.Mark, tag.Name)
		if h.bad() {
			*f = f.unusable(tag.Name)
			return false
		}
		if e.besides != nil {
			e.compare(f, src.Tag)
		}
	}
	*value, *d = h.Value, tag.doubt(h.Value, &e.tags[src.Tag].Scatter)
	return true
}

// unusable is the figure without one because the tag, whose mark it has, reads bad.
func (f *Figure) unusable(tag string) Figure {
	bad := f.fail(BadReading, fmt.Sprintf("tag %q is bad: %v", tag, f.Mark))
	bad.Mark, bad.By = f.Mark, f.By
	return bad
}
