package loads

import (
	"fmt"
	"math"
)

// rise puts in place how fast the content between the thermometers warms, K/s: the mean of
// the fitted rates of inlet and outlet, with its standard uncertainty. It marks f and
// returns false where too few readings tell.
func (e *Engine) rise(load int, f *Figure, s *steps) bool {
	q := &e.equations[load]
	if q.Stored == 0 {
		return true
	}
	for i, src := range [...]Source{ofInlet: q.Inlet, ofOutlet: q.Outlet} {
		if src.Tag < 0 {
			continue
		}
		tag, t := &e.cfg.Tags[src.Tag], &e.loads[load].Trends[i]
		f.Until = min(f.Until, t.until(f.At))
		line := t.fit(f.At, tag.OnChange)
		if why := line.short(q.StoredOver); why != "" {
			*f = f.fail(Fitting, fmt.Sprintf("tag %q: %s", tag.Name, why))
			return false
		}
		s.x.Rise += line.Rate / 2
		s.uRise = math.Hypot(s.uRise, line.uncertainty(tag)/2)
		s.lines[i] = line
		f.mark(t.mark(f.At, tag.OnChange), tag.Name)
	}
	return true
}

// correction is what the corrections of the stream add to its duty, W. Of a stream that
// gives heat
//
//	P − C·dT/dt
//
// because it gives up what the pump leaves in it as well, but not what its content gives
// up by cooling; of one that takes heat the same, the other way.
func (q *equation) correction(x *State) float64 {
	by := -q.Stored * x.Rise
	if q.HasPump {
		by += x.Pump
	}
	if q.Gives {
		return by
	}
	return -by
}

// storedSpread adds the uncertainty of the stored heat: of C, which drawings tell, to what
// lasts, and of the rise to what does not. Over a long time what is stored adds
// up to nothing, so that the variance is an upper bound.
func (q *equation) storedSpread(f *Figure, s *steps) {
	if q.Stored == 0 || !f.Measured() {
		return
	}
	f.Share[PartContent] = -q.Stored * s.x.Rise * shellHalf / math.Sqrt(3)
	if !q.Gives {
		f.Share[PartContent] *= -1
	}
	random := q.Stored * s.uRise
	f.Random = math.Hypot(f.Random, random)
	f.Variance += random * random * float64(q.StoredOver) / 1e9
	f.Uncertainty = math.Sqrt(f.Uncertainty*f.Uncertainty + f.Share[PartContent]*f.Share[PartContent] + random*random)
}
