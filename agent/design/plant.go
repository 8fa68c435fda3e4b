package design

import (
	"heatreeve/agent/design/cause"
	"heatreeve/agent/design/exchanger"
	"heatreeve/agent/design/expect"
)

// Config is what a plant's loads and exchangers should do.
type Config struct {
	Loads      []Target
	Exchangers []Exchanger
}

// Plant judges all loads and exchangers of one site. The same minutes give the same verdicts.
type Plant struct {
	judges    []*Judge
	exchanges []*Exchange
	changed   []Warning
	told      []Told
}

// Told is what was expected of a load in one minute: its duty, W, and the standard uncertainty
// of that by what lasts.
type Told struct {
	Load          int
	Start         int64 // of the minute
	Duty, Lasting float64
}

// NewPlant returns the judges of a plant that has shown nothing yet.
func NewPlant(cfg Config) *Plant {
	p, l := &Plant{}, make(limits)
	for _, t := range cfg.Loads {
		p.judges = append(p.judges, newJudge(t, l))
	}
	for _, of := range cfg.Exchangers {
		x := newExchange(of, l)
		p.exchanges = append(p.exchanges, x)
		x.Of = fingerprint(x.named(cfg.Loads))
		for side, load := range [...]int{of.Hot, of.Cold} {
			if j := p.judges[load]; j.target.ByExchanger {
				j.Of = fingerprint([]uint64{j.Of, x.Of}) // what is expected changes with the exchanger
			}
			p.judges[load].meets(x, side, p.judges[[...]int{of.Cold, of.Hot}[side]])
		}
	}
	return p
}

// named is the exchanger by the names of its sides, which stay when loads are added to a site.
func (x *Exchange) named(loads []Target) any {
	of := x.of
	sides := [...]string{loads[of.Hot].Name, loads[of.Cold].Name}
	of.Hot, of.Cold = 0, 0
	return struct {
		Exchanger
		Sides [2]string
	}{of, sides}
}

// Observe takes in the next minute of a load, with the hour of the week in which it began.
// Minutes of one load come in the order of time. What a load is judged by its exchanger for
// waits for the other side's minute, at most a quarter of an hour.
//
// It returns what was expected of those minutes that could be judged by now, where anything
// was: of m, or where an exchanger tells, of the minutes for which m had to come. It is good
// until the next call.
func (p *Plant) Observe(load int, m Minute, hour int) []Told {
	j := p.judges[load]
	p.told = p.told[:0]
	if !j.target.ByExchanger || j.exchange == nil {
		e := j.expected(&m, hour)
		p.tell(load, m.Start, &e)
		j.Observe(&m, e)
	}
	if x := j.exchange; x != nil {
		x.Pairing.enter(j.side, m)
		for pair, ok := x.Pairing.next(); ok; pair, ok = x.Pairing.next() {
			p.settle(x, pair)
			x.Pairing.drop(pair)
		}
		p.changed = x.take(p.changed)
	}
	p.changed = j.take(p.changed)
	return p.told
}

func (p *Plant) tell(load int, start int64, e *expect.Expected) {
	if e.Known {
		p.told = append(p.told, Told{load, start, e.Duty, e.Lasting})
	}
}

// settle judges a minute of both sides of an exchanger.
func (p *Plant) settle(x *Exchange, pair [2]*Minute) {
	steady := true
	of := [...]int{x.of.Hot, x.of.Cold}
	sides := [...]*Judge{p.judges[of[0]], p.judges[of[1]]}
	var today [2]expect.Expected
	if sides[0].target.ByExchanger || sides[1].target.ByExchanger {
		today = x.expected(pair)
	}
	for side, j := range sides {
		if m := pair[side]; m != nil && j.target.ByExchanger {
			p.tell(of[side], m.Start, &today[side])
			j.Observe(m, today[side])
			p.changed = j.take(p.changed)
		}
		steady = steady && j.Gate.Now.Steady
	}
	x.observe(pair, steady)
	x.warn(sides[0])
}

// expected is what the design tells of a minute.
func (j *Judge) expected(m *Minute, hour int) expect.Expected {
	if j.target.Expect == nil {
		return expect.Expected{Why: "the load has no design"}
	}
	j.Conditions = expect.Conditions{Hour: hour, Drivers: m.Drivers}
	return j.target.Expect.At(j.Conditions)
}

// Verdict is that of a load, given whether it is blind or idle at this instant.
func (p *Plant) Verdict(load int, blind, idle bool) Verdict {
	return p.judges[load].Verdict(blind, idle)
}

// Grounds are those of a load.
func (p *Plant) Grounds(load int) Grounds { return p.judges[load].Grounds() }

// Evidence is what is known of a load, for [cause.Rank].
func (p *Plant) Evidence(load int) cause.Evidence { return p.judges[load].Evidence() }

// Expecting is the exchanger by which the duty of a load is expected, with its state in the
// last minute; false where it is expected by something else.
func (p *Plant) Expecting(load int) (of Exchanger, minute exchanger.State, ok bool) {
	j := p.judges[load]
	if !j.target.ByExchanger || j.exchange == nil {
		return of, minute, false
	}
	return j.exchange.of, j.exchange.Minute, true
}

// Exchanger is what an exchanger did in its last window.
func (p *Plant) Exchanger(i int) Standing { return p.exchanges[i].Last }

// Warnings returns those that stand, by load and then by exchanger.
func (p *Plant) Warnings() []Warning {
	var all []Warning
	for _, j := range p.judges {
		all = append(all, j.Standing...)
	}
	for _, x := range p.exchanges {
		all = append(all, x.Standing...)
	}
	return all
}

// Changed returns the warnings that were raised, with End 0, or are over since it was last
// called, in their order; they are good until the next call of Observe.
func (p *Plant) Changed() []Warning {
	out := p.changed
	p.changed = nil
	return out
}

// Saved is the state of a plant, by the names of loads and exchangers.
type Saved struct {
	Judges    map[string]Judge
	Exchanges map[string]Exchange
}

// Save returns the state that Restore goes on from to the same verdicts.
func (p *Plant) Save() Saved {
	s := Saved{Judges: make(map[string]Judge, len(p.judges)), Exchanges: make(map[string]Exchange, len(p.exchanges))}
	for _, j := range p.judges {
		s.Judges[j.target.Name] = *j
	}
	for _, x := range p.exchanges {
		s.Exchanges[x.of.Name] = *x
	}
	return s
}

// Restore takes up what an earlier plant saved. A load or exchanger that it does not know
// begins afresh. So does one of which something else is expected, since a sum of deviations
// from that tells nothing; its warnings stand until they are decided on by the new design.
func (p *Plant) Restore(s Saved) {
	for _, j := range p.judges {
		if was, ok := s.Judges[j.target.Name]; ok {
			j.restore(was)
		}
	}
	for _, x := range p.exchanges {
		if was, ok := s.Exchanges[x.of.Name]; ok {
			x.restore(was)
		}
	}
}
