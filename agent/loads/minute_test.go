package loads

import (
	"math"
	"testing"
)

// What lasts of the uncertainty adds up with its sign, what does not as a variance; idle
// time has neither. A flow of 2 kg/s ± 1 % of 160 kW leaves 0.01/√3·160 kW, an outlet that
// reads too warm by 0.3 K/√3 takes 2 kg/s·4 kJ/(kg K) of it away, for 45 s (arithmetic).
func TestMinuteTellsItsUncertainty(t *testing.T) {
	for _, gives := range []bool{true, false} {
		cfg := plant(liquid)
		cfg.Loads[0].Stream.Gives = gives
		cfg.Tags[flow].Accuracy = Accuracy{Rel: 0.01}
		cfg.Tags[outlet].Accuracy = Accuracy{Abs: 0.3}
		sign := map[bool]float64{true: 1, false: -1}[gives]
		e := engine(t, cfg)
		e.Advance(Beat{at(0, 2, 350, 330), through(0)}, nil)
		closed := e.Advance(Beat{at(45, 0, 350, 330), through(61)}, nil)
		m := closed[0]
		near(t, "systematic by flow", m.Systematic[PartFlow], sign*0.01/math.Sqrt(3)*160e3*45, 1e-6)
		near(t, "systematic by outlet", m.Systematic[PartOutlet], -sign*0.3/math.Sqrt(3)*8e3*45, 1e-6)
		near(t, "random", m.Random, 0, 0)
		var rest float64
		for p, x := range m.Systematic {
			if Part(p) != PartFlow && Part(p) != PartOutlet {
				rest += math.Abs(x)
			}
		}
		near(t, "systematic by anything else", rest, 0, 0)
	}
}

// The variance of a minute is the integral of that of its figures: here a difference that
// reads 20 K and 21 K by turns, so that half the mean square of the differences, 0.5 K²,
// stands for a second each, times (2 kg/s·4 kJ/(kg K))².
func TestMinuteAddsVariance(t *testing.T) {
	e := engine(t, plant(liquid))
	var closed []Minute
	for s := 0.0; s <= 180; s++ {
		closed = e.Advance(Beat{at(s, 2, 350+math.Mod(s, 2), 330), through(s)}, closed)
	}
	near(t, "variance", closed[2].Random, 0.5*8e3*8e3*60, 1e-3)
	near(t, "systematic", closed[2].Systematic[PartInlet], 0, 0)
}

// Counted heat has the same parts, in proportion to the flow, and the variance with its
// square; what the counter's own accuracy leaves is that of a reading in proportion.
func TestCountedMinuteTellsItsUncertainty(t *testing.T) {
	cfg := countingPlant()
	cfg.Tags[flow].Accuracy = Accuracy{Abs: 5, Rel: 0.01}
	cfg.Tags[outlet].Accuracy = Accuracy{Abs: 0.3}
	e := engine(t, cfg)
	var closed []Minute
	for s := 0.0; s <= 180; s++ {
		rr := temps(s, 350+math.Mod(s, 2), 330)
		if math.Mod(s, 45) == 0 {
			rr = append(rr, counts(s, 2*s)...)
		}
		closed = e.Advance(Beat{rr, through(s + 1)}, closed)
	}
	if len(closed) != 3 {
		t.Fatalf("%d minutes, want 3", len(closed))
	}
	m := closed[2]
	near(t, "systematic by flow", m.Systematic[PartFlow], 0.01/math.Sqrt(3)*8e3*20.5*60, 1e-3)
	near(t, "systematic by outlet", m.Systematic[PartOutlet], -0.3/math.Sqrt(3)*8e3*60, 1e-6)
	near(t, "variance", m.Random, 0.5*8e3*8e3*60, 1e-3)
}
