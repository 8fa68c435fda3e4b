package store

import (
	"math"
	"math/bits"
)

// mostSealed is how many minutes of a load a block may hold. It bounds what a reader must
// hold in memory, whatever the block says.
const mostSealed = 1 << 12

// figureHead precedes the numbers of one figure.
type figureHead struct {
	kind   int
	full   bool // on scaleFull, for the figure's own scale does not tell all of its floats
	before bool // a number's excess over what it resembles is told by that of the one before
	like   int  // 0, or 1 + index of the figure's likes
}

const (
	kindZero     = iota // all are 0
	kindConstant        // all are the float that follows
	kindNumbers
	kinds

	kindBits, flagBits, likeBits = 2, 1, 2

	countBits = 8 // of how many figures there are
)

func (h *figureHead) put(w *bitWriter) {
	w.even(uint64(h.kind), kindBits)
	if h.kind == kindNumbers {
		w.even(bitOf(h.full), flagBits)
		w.even(bitOf(h.before), flagBits)
		w.even(uint64(h.like), likeBits)
	}
}

func (h *figureHead) get(r *bitReader) {
	h.kind = int(r.even(kindBits))
	if h.kind == kindNumbers {
		h.full, h.before, h.like = r.even(flagBits) != 0, r.even(flagBits) != 0, int(r.even(likeBits))
	}
}

func bitOf(b bool) uint64 {
	if b {
		return 1
	}
	return 0
}

// appendMinuteColumn writes the minutes of one load, of which there is one at least, sorted
// by start; origin is the start of their block.
func appendMinuteColumn(b []byte, all []Minute, origin int64) []byte {
	instants := make([]int64, len(all))
	for i := range all {
		instants[i] = all[i].Start
	}
	t := ticksOf(instants)
	b = append(b, byte(t.tick))
	b = appendInstant(b, t.start-origin)
	begin := len(b)
	w := newBitWriter(b)
	var times numbers
	for _, at := range instants {
		times.put(&w, t.late(at))
	}
	tells := lastTold(all) + 1
	w.even(uint64(tells), countBits)
	column, like := make([]int64, len(all)), make([]int64, len(all))
	for i := range tells {
		figures[i].put(&w, all, column, like)
	}
	return w.finish(begin)
}

// lastTold is the index of the last figure that is not 0 in all minutes, or -1.
func lastTold(all []Minute) int {
	i := len(figures) - 1
	for i >= 0 && figures[i].kind(all) == kindZero {
		i--
	}
	return i
}

// put writes a figure of all minutes; column and like are room for as many numbers.
func (f *figure) put(w *bitWriter, all []Minute, column, like []int64) {
	h := figureHead{kind: f.kind(all)}
	if h.kind == kindNumbers {
		h.full = !f.numbers(all, column)
		h.like, h.before = f.shortest(all, column, like, h.full)
	}
	h.put(w)
	switch h.kind {
	case kindConstant:
		w.even(math.Float64bits(*f.of(&all[0])), 64)
	case kindNumbers:
		f.fill(all, like, h)
		var n numbers
		before := int64(0)
		for i, number := range column {
			excess := number - like[i]
			n.put(w, excess-before)
			if h.before {
				before = excess
			}
		}
	}
}

func (f *figure) kind(all []Minute) int {
	first := math.Float64bits(*f.of(&all[0]))
	for i := range all {
		if math.Float64bits(*f.of(&all[i])) != first {
			return kindNumbers
		}
	}
	if first == 0 {
		return kindZero
	}
	return kindConstant
}

// numbers sets column to the figure's numbers, and returns false where these are of
// scaleFull.
func (f *figure) numbers(all []Minute, column []int64) (own bool) {
	for i := range all {
		x := *f.of(&all[i])
		column[i] = f.scale.number(x)
		if math.Float64bits(f.scale.float(column[i])) != math.Float64bits(x) {
			for i := range all {
				column[i] = scaleFull.number(*f.of(&all[i]))
			}
			return false
		}
	}
	return true
}

// shortest finds out what the numbers of a column are to be told by.
func (f *figure) shortest(all []Minute, column, like []int64, full bool) (best int, before bool) {
	least := math.MaxInt
	for i := range len(f.likes) + 1 {
		f.fill(all, like, figureHead{full: full, like: i})
		plain, stepped, last := 0, 0, int64(0)
		for i, number := range column {
			excess := number - like[i]
			plain += sizeOf(excess)
			stepped += sizeOf(excess - last)
			last = excess
		}
		if least > min(plain, stepped) {
			best, before, least = i, stepped < plain, min(plain, stepped)
		}
	}
	return best, before
}

// sizeOf is how many bits the magnitude of a number takes.
func sizeOf(x int64) int { return bits.Len64(uint64(max(x, -x))) }

// fill sets like to what the numbers of minutes resemble.
func (f *figure) fill(all []Minute, like []int64, h figureHead) {
	for i := range all {
		like[i] = f.likeness(&all[i], h)
	}
}

func (f *figure) likeness(m *Minute, h figureHead) int64 {
	if h.like == 0 {
		return 0
	}
	s := f.scale
	if h.full {
		s = scaleFull
	}
	return s.likeness(f.likes[h.like-1](m))
}

// parseMinuteColumn adds to all the count minutes of a load. Bytes that no writer made give
// an error or any minutes, never a panic.
func parseMinuteColumn(all []Minute, b []byte, count uint64, origin int64, load uint32) ([]Minute, error) {
	instants, r, err := parseStarts(b, count, origin)
	if err != nil {
		return all, err
	}
	begin := len(all)
	for _, at := range instants {
		all = append(all, Minute{Load: load, Start: at})
	}
	known := int(r.even(countBits))
	if known > len(figures) {
		return all[:begin], errRecord
	}
	for i := range known { // the others are 0, or an earlier program did not know them
		if !figures[i].get(&r, all[begin:]) {
			return all[:begin], errRecord
		}
	}
	return all, nil
}

// parseStarts reads when the minutes of a column begin; r is to read on.
func parseStarts(b []byte, count uint64, origin int64) (instants []int64, r bitReader, err error) {
	p := parser{rest: b}
	head := p.take(1)
	if p.bad || head[0] > maxDigits || count > mostSealed {
		return nil, r, errRecord
	}
	t := ticks{tick: int(head[0]), start: origin + p.instant()}
	if p.bad {
		return nil, r, errRecord
	}
	r = newBitReader(p.rest)
	var times numbers
	for range count {
		instants = append(instants, t.next(times.get(&r)))
	}
	return instants, r, nil
}

// get reads a figure of all minutes.
func (f *figure) get(r *bitReader, all []Minute) (ok bool) {
	var h figureHead
	h.get(r)
	if h.kind >= kinds || h.like > len(f.likes) {
		return false
	}
	switch h.kind {
	case kindConstant:
		x := math.Float64frombits(r.even(64))
		for i := range all {
			*f.of(&all[i]) = x
		}
	case kindNumbers:
		s := f.scale
		if h.full {
			s = scaleFull
		}
		var n numbers
		before := int64(0)
		for i := range all {
			m := &all[i]
			excess := before + n.get(r)
			*f.of(m) = s.float(f.likeness(m, h) + excess)
			if h.before {
				before = excess
			}
		}
	}
	return true
}
