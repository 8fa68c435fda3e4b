package demo

import (
	"fmt"
	"hash/fnv"
	"math"
	"math/rand/v2"
	"time"

	"heatreeve/agent/site"
)

// part is what one transmitter of a circuit measures.
type part uint8

const (
	partFlow part = iota
	partInlet
	partOutlet
	partPressure
	partOutletPressure
	partCount
)

// signal is the transmitter behind a tag.
type signal struct {
	circuit  int
	part     part
	key      uint64 // of its noise
	decimals int
}

// A transmitter's noise stays within a tenth of what it may be off, and its last
// digit is no more than a tenth either.
const (
	noiseShare = 0.1
	digitShare = 0.1
)

// wire finds what each tag of the site measures; typical are states of the circuits.
func wire(s *site.Site, circuits []circuit, typical []state, seed uint64) ([]signal, error) {
	signals, wired := make([]signal, len(s.Tags)), make([]bool, len(s.Tags))
	for i := range circuits {
		for part, tag := range circuits[i].tags() {
			if wired[tag] {
				return nil, fmt.Errorf("site %q: tag %q is read twice; each transmitter of the invented plant has one place", s.Name, s.Tags[tag].Name)
			}
			wired[tag] = true
			signals[tag] = signal{i, part, noiseKey(seed, s.Tags[tag].Name), decimals(&s.Tags[tag], typical[i].parts[part])}
		}
	}
	for i, w := range wired {
		if !w {
			return nil, fmt.Errorf("site %q: tag %q is read by no load; the invented plant has no value for it", s.Name, s.Tags[i].Name)
		}
	}
	return signals, nil
}

// tags are the circuit's transmitters with their tags.
func (c *circuit) tags() map[part]int {
	s := c.Stream
	tags := make(map[part]int)
	for i, src := range [...]site.Source{partFlow: s.Flow, partInlet: s.Inlet, partOutlet: s.Outlet, partPressure: s.Pressure, partOutletPressure: s.OutletPressure} {
		if !src.Constant() {
			tags[part(i)] = src.Tag
		}
	}
	if s.OutletPressure == s.Pressure {
		delete(tags, partOutletPressure) // one transmitter for both ends
	}
	return tags
}

func noiseKey(seed uint64, tag string) uint64 {
	h := fnv.New64a()
	h.Write([]byte(tag))
	return h.Sum64() ^ seed
}

// decimals is how many a transmitter shows at a typical reading, SI.
func decimals(t *site.Tag, typical float64) int {
	digit := digitShare * t.Accuracy.HalfWidth(typical) / t.Scale
	if digit <= 0 {
		return 3
	}
	return int(min(6, max(0, math.Ceil(-math.Log10(digit)))))
}

// reading is what the transmitter shows in the tag's own unit where the truth is
// x in SI. A flow of zero is shown as zero: the meter cuts creep off.
func (s *signal) reading(t *site.Tag, x float64, elapsed time.Duration) float64 {
	if s.part != partFlow || x != 0 {
		x += noiseShare * t.Accuracy.HalfWidth(x) * s.noise(elapsed)
	}
	scale := math.Pow10(s.decimals)
	return math.Round((x-t.Offset)/t.Scale*scale) / scale
}

// noise is in −1 to 1, with a standard deviation of a third, and new every
// second of the plant's time.
func (s *signal) noise(elapsed time.Duration) float64 {
	r := rand.New(rand.NewPCG(s.key, uint64(elapsed/time.Second)))
	return (2*(r.Float64()+r.Float64()+r.Float64()) - 3) / 3
}
