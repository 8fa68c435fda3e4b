package loads

import "math"

// scatter is what the readings of a tag tell of how far one of them may be off by what
// changes from reading to reading: noise of the signal, and the way of the quantity while
// a reading is held. Sizes are exponentially weighted means over successive readings, of
// equal weight while there are few.
//
// Half the mean square of successive differences is the variance of noise, whatever the
// slow course of the quantity (J. von Neumann et al., Ann. Math. Stat. 12, 1941, from
// memory). What a moving quantity adds to it is more than what is missed of its integral
// while a reading is held: in standard uncertainty √1.5 times for a random walk, up to √6
// times where it keeps coming back, and once where it has no memory.
//
// Two things the differences cannot tell. Noise with a memory looks like a quantity that
// moves: where each error keeps a half of the one before, the uncertainty of an energy is
// 0.41 of what it should be. And a quantity that climbs steadily is followed half a step
// behind, which no count of readings lessens: over a period it leaves half the time
// between two readings times the difference of the quantity between end and beginning,
// and comes back on the way down.
type scatter struct {
	Seen   uint8   // differences in the means, up to steadyAfter
	Square float64 // mean of d², in the tag's unit squared
	Swept  float64 // mean of (d·τ)², τ the time in s from one reading to the next
	Step   float64 // mean of τ, s
}

// steadyAfter is the number of differences after which a mean forgets: each new one then
// weighs 1/steadyAfter. Of white noise the standard uncertainty is found to some 15 %, as
// well as from 20 readings (JCGM 100:2008, table E.1, has 16 % for these), and a step of
// the quantity is forgotten by half every 22 readings.
const steadyAfter = 16

// observe takes in the reading after the one that was held, unless that had run out of
// age: what came after it is another story. So is what comes beside a bad
// reading, or after one that was set aside. A difference whose square is beyond all numbers
// is none, since no mean would come back from it.
func (s *scatter) observe(before *held, next *sample, maxAge int64) {
	if !before.Has || before.bad() || before.Aside || next.bad() || next.At-before.At >= maxAge {
		return
	}
	d, step := next.Value-before.Value, float64(next.At-before.At)*1e-9
	if !(d*d*step*step <= math.MaxFloat64 && d*d <= math.MaxFloat64) {
		return
	}
	s.Seen = min(s.Seen+1, steadyAfter)
	w := 1 / float64(s.Seen)
	s.Square += w * (d*d - s.Square)
	s.Swept += w * (d*d*step*step - s.Swept)
	s.Step += w * (step - s.Step)
}

// variance is that of one reading, in the tag's unit squared.
func (s *scatter) variance() float64 { return s.Square / 2 }

// rate is what the readings add to the variance of their integral over time, in the tag's
// unit squared times s: the variance of a reading times the time for which it stands.
func (s *scatter) rate() float64 {
	if s.Seen == 0 {
		return 0
	}
	return s.Swept / 2 / s.Step
}
