package loads

import "math"

// The fates of a grid point.
const (
	isUndecided = iota
	isMeasured
	isBridged
	isMissing
)

// instant is a load at a grid point. Duty and its uncertainty are those of one unit of flow
// until a count decides.
type instant struct {
	g            int64
	counting     bool // the counter is alive, or there is none
	figure, idle bool // there is a duty
	gap          bool // there is none for want of data alone
	duty         float64
	parts        Shares
	variance     float64
	uncertain    bool
	fate         int
}

// figures works the load at each grid point.
func (o *recount) figures(load int) []instant {
	s := &o.cfg.Loads[load].Stream
	counted := o.counted(load)
	flows, ins, outs := o.column(s.Flow), o.column(s.Inlet), o.column(s.Outlet)
	alive := make([]bool, len(flows))
	if counted {
		alive = o.counts(s.Flow.Tag)
	}
	other := [3][]bool{o.disagrees(s.Flow), o.disagrees(s.Inlet), o.disagrees(s.Outlet)}
	pump := o.column(o.cfg.Loads[load].Running)
	points := make([]instant, len(flows))
	for i := range points {
		p := &points[i]
		p.g = o.from + int64(i)*o.cfg.Grid
		p.counting = !counted || alive[i]
		m := flows[i].Value
		if counted {
			m = 1
		}
		switch {
		case counted && !alive[i] || !counted && !flows[i].usable:
			p.gap = true
		case !counted && math.Abs(m) <= s.IdleBelow:
			p.figure, p.idle, p.uncertain = true, true, isUncertain(flows[i].Reading) || other[0][i]
		case m < 0:
		case !ins[i].usable || !outs[i].usable:
			p.gap = true
		case max(ins[i].Value, outs[i].Value) > liquid.hi-s.Margin:
		default:
			p.figure = true
			p.uncertain = !counted && isUncertain(flows[i].Reading) || isUncertain(ins[i].Reading) || isUncertain(outs[i].Reading) || other[0][i] || other[1][i] || other[2][i] ||
				o.cfg.Loads[load].HasRunning && pump[i].usable && pump[i].Value == 0 && m*m > 4*o.squared(s.Flow, flows[i])
			o.work(p, s, m, flows[i], ins[i], outs[i])
		}
	}
	return points
}

func (o *recount) counted(load int) bool {
	src := o.cfg.Loads[load].Stream.Flow
	return o.cfg.Tags[src.Tag].Counter != nil
}

// work is the heat equation, by hand, with what it does with each error.
func (o *recount) work(p *instant, s *Stream, m float64, flow, in, out known) {
	cp := liquid.cp
	if !s.Gives {
		cp = -cp
	}
	byFlow, byT := cp*(in.Value-out.Value), cp*m
	p.duty = byFlow * m
	uFlow, aloneFlow := o.lasting(s.Flow, flow.Value)
	if t := &o.cfg.Tags[s.Flow.Tag]; t.Counter != nil {
		uFlow, aloneFlow = t.Accuracy.Rel/math.Sqrt(3), 0
	}
	uIn, aloneIn := o.lasting(s.Inlet, in.Value)
	uOut, aloneOut := o.lasting(s.Outlet, out.Value)
	p.parts = Shares{
		PartFlow:   byFlow * math.Sqrt(uFlow*uFlow+aloneFlow),
		PartInlet:  byT * math.Sqrt((1-s.Pair)*uIn*uIn+aloneIn),
		PartOutlet: -byT * math.Sqrt((1-s.Pair)*uOut*uOut+aloneOut),
		PartPair:   byT * (uIn - uOut) * math.Sqrt(s.Pair),
	}
	wrong := out.Value - in.Value
	if !s.Gives {
		wrong = -wrong
	}
	variance := uIn*uIn + uOut*uOut - 2*s.Pair*uIn*uOut + aloneIn + aloneOut + in.noise + out.noise
	p.uncertain = p.uncertain || !s.BothWays && variance > 0 && wrong > 0 && wrong*wrong > 4*variance
	p.variance = byFlow*byFlow*flow.variance + byT*byT*(in.variance+out.variance)
}

// bridge decides on the gaps, as far as data decide.
func (o *recount) bridge(points []instant) {
	for i := 0; i < len(points); i++ {
		p := &points[i]
		p.fate = isMissing
		if p.figure {
			p.fate = isMeasured
		}
		if i == 0 || o.cfg.Bridge == 0 || !p.gap || !p.counting || !points[i-1].figure || !points[i-1].counting {
			continue
		}
		end := i
		for end < len(points) && points[end].gap && points[end].counting {
			end++
		}
		short := int64(end-i)*o.cfg.Grid <= o.cfg.Bridge
		open := end == len(points)
		for k := i; k < end; k++ {
			points[k].fate = isMissing
			switch {
			case short && open:
				points[k].fate = isUndecided
			case short && points[end].figure && points[end].counting:
				points[k].fate = isBridged
				points[k].duty = points[i-1].duty + (points[end].duty-points[i-1].duty)*float64(k-i+1)/float64(end-i+1)
			}
		}
		i = end - 1
	}
}

// count decides by what the counter told: what it did not tell in time is missing. It
// returns the variance by the steps of the register.
func (o *recount) count(points []instant, tells []told, step float64) (variance float64) {
	heats := make([]float64, len(tells))
	for i := range points {
		p, n := &points[i], 0
		for n < len(tells) && tells[n].to <= p.g {
			n++
		}
		silent := i
		for silent < len(points) && points[silent].counting {
			silent++
		}
		switch {
		case silent < len(points) && (n == len(tells) || points[silent].g < tells[n].to):
			p.fate = isMissing
		case n == len(tells) || p.fate == isUndecided:
			p.fate = isUndecided
		case !tells[n].known:
			p.fate = isMissing
		case tells[n].amount == 0:
			*p = instant{g: p.g, counting: p.counting, idle: true, fate: isMeasured, uncertain: tells[n].doubted}
		default:
			seconds := float64(tells[n].to-tells[n].from) / 1e9
			if p.fate == isMeasured {
				heats[n] += p.duty * float64(o.cfg.Grid) / 1e9 / seconds
			}
			p.scale(tells[n].amount / seconds)
			p.uncertain = p.uncertain || tells[n].doubted
		}
	}
	for _, h := range heats {
		variance += h * h * step * step / 6 // of the difference of two roundings
	}
	return variance
}

func (p *instant) scale(rate float64) {
	p.duty *= rate
	p.variance *= rate * rate
	for k := range p.parts {
		p.parts[k] *= rate
	}
}

// account is the load's time and heat, by minutes and, under 0, in all.
func (o *recount) account(load int) map[int64]*Minute {
	points := o.figures(load)
	o.bridge(points)
	all := map[int64]*Minute{0: {}}
	l := &o.cfg.Loads[load]
	if o.counted(load) {
		t := &o.cfg.Tags[l.Stream.Flow.Tag]
		largest := t.Counter.Largest
		if largest == 0 {
			largest = largestMassFlow
		}
		all[0].Random = o.count(points, o.tells(l.Stream.Flow.Tag, largest), t.Resolution)
	}
	for i := range points {
		p := &points[i]
		start := floor(p.g, minute)
		if all[start] == nil {
			all[start] = &Minute{Start: start}
		}
		p.add(all[start], o.cfg.Grid, l.Stream.Gives)
		p.add(all[0], o.cfg.Grid, l.Stream.Gives)
	}
	if l.HasWitness {
		o.attest(points, all, l.Witness.Tag)
	}
	return all
}

// add books the grid point.
func (p *instant) add(m *Minute, grid int64, gives bool) {
	heat := p.duty * float64(grid) / 1e9
	if !gives {
		heat = -heat
	}
	switch p.fate {
	case isMeasured:
		m.Measured += grid
		if p.uncertain {
			m.Uncertain += grid
		}
		m.Given += max(heat, 0)
		m.Taken += max(-heat, 0)
		m.Random += p.variance * float64(grid) / 1e9
		for k, part := range p.parts {
			m.Systematic[k] += part * float64(grid) / 1e9
		}
		if p.idle {
			m.Idle += grid
		}
	case isBridged:
		m.Bridged += grid
		m.BridgedGiven += max(heat, 0)
		m.BridgedTaken += max(-heat, 0)
	case isMissing:
		m.Missing += grid
	}
}

// attest compares the spans between the first readings of the witness in a minute.
func (o *recount) attest(points []instant, all map[int64]*Minute, tag int) {
	var from, last int64
	rise, sure := 0.0, true
	for _, k := range o.tells(tag, largestRate) {
		rise, sure = rise+k.amount, sure && k.known
		if last != 0 && floor(last, minute) == floor(k.to, minute) {
			continue
		}
		heat := 0.0
		for i := range points {
			if g := points[i].g; g >= from && g < k.to {
				heat += points[i].duty * float64(o.cfg.Grid) / 1e9
				sure = sure && points[i].fate == isMeasured
			}
		}
		if from != 0 && sure {
			for _, m := range []*Minute{all[floor(k.to-1, minute)], all[0]} {
				m.Witness += rise
				m.Compared += heat
			}
		}
		from, last, rise, sure = k.to, k.to, 0, true
	}
}
