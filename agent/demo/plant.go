package demo

import (
	"fmt"
	"slices"
	"time"

	"heatreeve/agent/site"
)

// Condition is what a transmitter does at an instant.
type Condition uint8

const (
	Sends   Condition = iota // its value
	Silent                   // nothing
	Garbled                  // text that is no value
)

// Sample is what one transmitter has to say at one instant.
type Sample struct {
	Tag       int     // index into Site.Tags
	Value     float64 // in the tag's own unit, with noise, rounded to Decimals
	Decimals  int
	Condition Condition
}

// Plant is the invented plant. It is immutable: what it does at an instant
// follows from the site, the seed and the instant.
type Plant struct {
	site     *site.Site
	circuits []circuit
	exchange *exchange
	signals  []signal // one a tag, in their order
}

// NewPlant returns the plant that s describes. The error names what in s the
// invented plant cannot follow.
func NewPlant(s *site.Site, seed uint64) (*Plant, error) {
	circuits, err := findCircuits(s)
	if err != nil {
		return nil, err
	}
	p := &Plant{site: s, circuits: circuits}
	if p.exchange, err = newExchange(circuits); err != nil {
		return nil, fmt.Errorf("site %q: %w", s.Name, err)
	}
	typical, err := p.states(rampEnds)
	if err != nil {
		return nil, err
	}
	if p.signals, err = wire(s, circuits, typical, seed); err != nil {
		return nil, err
	}
	if err := checkPayload(s.Tags); err != nil {
		return nil, fmt.Errorf("site %q: %w", s.Name, err)
	}
	const look = 5 * time.Minute
	for t := time.Duration(0); t < dayLength; t += look {
		if _, err := p.At(t); err != nil {
			return nil, err
		}
	}
	return p, nil
}

// At returns what every transmitter has to say when elapsed time has passed
// since 05:30 of the first day, in the order of Site.Tags. The error is that of a
// fluid which has no properties at a state of the day.
func (p *Plant) At(elapsed time.Duration) ([]Sample, error) {
	t := elapsed % dayLength
	states, err := p.states(t)
	if err != nil {
		return nil, err
	}
	samples := make([]Sample, len(p.signals))
	for i, s := range p.signals {
		samples[i] = Sample{
			Tag: i, Decimals: s.decimals,
			Value:     s.reading(&p.site.Tags[i], states[s.circuit].parts[s.part], elapsed),
			Condition: p.circuits[s.circuit].condition(s.part, t),
		}
	}
	return samples, nil
}

// states are those of the circuits at the time of day t.
func (p *Plant) states(t time.Duration) ([]state, error) {
	states := make([]state, len(p.circuits))
	met, err := p.exchange.at(p.circuits, t)
	if err != nil {
		return nil, err
	}
	for i := range p.circuits {
		if side := slices.Index(p.exchange.sides[:], i); side >= 0 {
			states[i] = met[side]
		} else if states[i], err = p.circuits[i].at(t); err != nil {
			return nil, fmt.Errorf("load %q: %w", p.circuits[i].Name, err)
		}
	}
	return states, nil
}

// Duty is what the load truly moves when elapsed time has passed, in W, positive
// in its service.
func (p *Plant) Duty(load string, elapsed time.Duration) (float64, error) {
	for i := range p.circuits {
		if p.circuits[i].Name == load {
			states, err := p.states(elapsed % dayLength)
			if err != nil {
				return 0, err
			}
			return states[i].duty, nil
		}
	}
	return 0, fmt.Errorf("the invented plant has no load %q; it has %s", load, knownLoads())
}
