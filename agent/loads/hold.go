package loads

import (
	"fmt"

	"heatreeve/ingest/quality"
)

// queue is what is between the two thermometers of a stream, in the order in which it
// leaves (plug flow: nothing mixes, and as much leaves as enters).
type queue struct{ Parcels []parcel }

// parcel is an amount that entered at one temperature.
type parcel struct {
	Volume float64 // m³, when it entered
	T      float64 // K
	Mark   quality.Mark
}

// full reports whether the queue fills the hold, m³.
func (q *queue) full(hold float64) bool { return q.volume() >= hold*(1-1e-9) }

func (q *queue) holds() bool { return len(q.Parcels) > 0 }

func (q *queue) volume() (v float64) {
	for _, p := range q.Parcels {
		v += p.Volume
	}
	return v
}

// leaving returns the mean temperature of the volume that leaves next, while as much
// enters at T, and the worst mark of what it was told by.
func (q *queue) leaving(volume, T float64) (mean float64, m quality.Mark) {
	left := volume
	for _, p := range q.Parcels {
		v := min(p.Volume, left)
		mean += v / volume * (p.T - T)
		m = quality.Worse(m, p.Mark)
		if left -= v; left <= 0 {
			break
		}
	}
	return T + mean, m
}

// move lets a volume in at T, and out what the hold has no room for. What enters joins
// the parcel before it until that is a sixtieth of the hold, so that there are never many.
func (q *queue) move(volume, T, hold float64, m quality.Mark) {
	n := len(q.Parcels)
	if n == 0 || q.Parcels[n-1].Volume >= hold/slots {
		q.Parcels = append(q.Parcels, parcel{T: T})
		n++
	}
	p := &q.Parcels[n-1]
	p.Volume += volume
	p.T += (T - p.T) * (volume / p.Volume)
	p.Mark = quality.Worse(p.Mark, m)
	over, out := q.volume()-hold, 0
	for ; out < n && over >= q.Parcels[out].Volume; out++ {
		over -= q.Parcels[out].Volume
	}
	q.Parcels = append(q.Parcels[:0], q.Parcels[out:]...)
	if over > 0 && len(q.Parcels) > 0 {
		q.Parcels[0].Volume -= over
	}
}

// displacement returns what passes the meter in the state x, m³/s: at the meter's density
// where it is metered by volume, and else at that of the inlet. The meter of what is
// calibrated at a density is taken to sit at the inlet.
func (q *equation) displacement(m *medium, x *State) (float64, error) {
	if q.FlowKind == VolumeFlow && q.CalibratedAt == 0 {
		return x.Flow, nil
	}
	in, err := m.inlet(x)
	if err != nil {
		return 0, err
	}
	return q.mass(m, x.Flow, in.Density) / in.Density, nil
}

// delay puts what leaves in the grid step from f.At in the place of what enters then. It
// marks f and returns false where that is not known: until the hold has been filled once,
// after the start and after each time in which flow or inlet were not known, the load is
// [Fitting], because to compare with what enters would book what the content stores.
func (e *Engine) delay(load int, f *Figure, s *steps) bool {
	q, l, x := &e.equations[load], &e.loads[load], &s.x
	switch {
	case q.Hold == 0:
		return true
	case s.again:
		x.Inlet = l.left.T
		f.mark(l.left.Mark, e.nameOf(q.Inlet))
		return true
	}
	if why, _ := q.phase(&q.declared, x); why != "" {
		*f = f.fail(Saturation, why)
		return false
	}
	passes, err := q.displacement(&q.declared, x)
	if err != nil {
		*f = f.fail(OutOfRange, err.Error())
		return false
	}
	if !l.Hold.full(q.Hold) {
		*f = f.fail(Fitting, fmt.Sprintf("%.4g l of the hold of %.4g l are filled with what the inlet has told of", l.Hold.volume()*1e3, q.Hold*1e3))
		return false
	}
	x.Inlet, l.left.Mark = l.Hold.leaving(passes*float64(e.cfg.Grid)/1e9, x.Inlet)
	l.left.T = x.Inlet
	f.mark(l.left.Mark, e.nameOf(q.Inlet))
	return true
}

// nameOf is the name of the tag that a source reads, empty of a constant.
func (e *Engine) nameOf(src Source) string {
	if src.Tag < 0 {
		return ""
	}
	return e.cfg.Tags[src.Tag].Name
}

// carry moves what is in the holds by a grid step from g.
func (e *Engine) carry(g int64) {
	for _, load := range e.holds {
		q, l := &e.equations[load], &e.loads[load]
		f := Figure{At: g}
		var x State
		var u doubt
		if !e.read(&f, q.Flow, &x.Flow, &u) {
			l.Hold = queue{}
			continue
		}
		if q.idle(x.Flow) {
			continue
		}
		f.Mark = quality.None // of the flow: it tells no temperature
		known := x.Flow > 0 && e.read(&f, q.Inlet, &x.Inlet, &u) && e.read(&f, q.Pressure, &x.Pressure, &u)
		passes, err := q.displacement(&q.declared, &x)
		if !known || err != nil || !(passes <= largestMassFlow) {
			l.Hold = queue{}
			continue
		}
		l.Hold.move(passes*float64(e.cfg.Grid)/1e9, x.Inlet, q.Hold, f.Mark)
	}
}
