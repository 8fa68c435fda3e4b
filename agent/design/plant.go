package design

import (
	"heatreeve/agent/design/cause"
	"heatreeve/agent/design/expect"
)

// Config is what a plant's loads should do.
type Config struct {
	Loads []Target
}

// Plant judges all loads of one site. The same minutes give the same verdicts.
type Plant struct {
	judges  []*Judge
	changed []Warning
}

// NewPlant returns the judges of a plant that has shown nothing yet.
func NewPlant(cfg Config) *Plant {
	p, l := &Plant{}, make(limits)
	for _, t := range cfg.Loads {
		p.judges = append(p.judges, newJudge(t, l))
	}
	return p
}

// Observe takes in the next minute of a load, with the hour of the week in which it began.
// Minutes of one load come in the order of time.
func (p *Plant) Observe(load int, m Minute, hour int) {
	j := p.judges[load]
	j.Observe(&m, j.expected(&m, hour))
	p.changed = j.take(p.changed)
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

// Warnings returns those that stand, by load.
func (p *Plant) Warnings() []Warning {
	var all []Warning
	for _, j := range p.judges {
		all = append(all, j.Standing...)
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

// Saved is the state of a plant, by the names of loads.
type Saved struct {
	Judges map[string]Judge
}

// Save returns the state that Restore goes on from to the same verdicts.
func (p *Plant) Save() Saved {
	s := Saved{Judges: make(map[string]Judge, len(p.judges))}
	for _, j := range p.judges {
		s.Judges[j.target.Name] = *j
	}
	return s
}

// Restore takes up what an earlier plant saved. A load that it does not know begins afresh.
// So does one of which another duty is expected, since a sum of deviations from something
// else tells nothing; its warnings stand until they are decided on by the new design.
func (p *Plant) Restore(s Saved) {
	for _, j := range p.judges {
		if was, ok := s.Judges[j.target.Name]; ok {
			j.restore(was)
		}
	}
}
