package store

// ticks tells a run of instants by how much the time between two of them differs from the
// time between the two before, in whole numbers of 10^tick ns. Sums wrap around, and so lose
// nothing at the ends of int64.
type ticks struct {
	tick    int
	start   int64
	at, gap int64 // of the instant before, in ticks after start
}

// ticksOf returns the coarsest ticks of instants, of which there is one at least.
func ticksOf(instants []int64) ticks {
	t := ticks{tick: maxDigits, start: instants[0]}
	for _, at := range instants {
		for (at-t.start)%unitOf(t.tick) != 0 {
			t.tick--
		}
	}
	return t
}

// unitOf is how many ns a tick has.
func unitOf(tick int) int64 { return int64(tens[tick]) }

// late tells the next instant.
func (t *ticks) late(instant int64) (late int64) {
	at := (instant - t.start) / unitOf(t.tick)
	gap := at - t.at
	late = gap - t.gap
	t.at, t.gap = at, gap
	return late
}

// next is the inverse of late.
func (t *ticks) next(late int64) (instant int64) {
	t.gap += late
	t.at += t.gap
	return t.start + t.at*unitOf(t.tick)
}
