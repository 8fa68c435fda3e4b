package store

import (
	"encoding/binary"
	"math"
)

// column holds readings of one tag in the order in which they were committed.
type column struct {
	at      []int64
	bits    []uint64
	stamped []bool
	marks   []uint8 // nil where all are 0
}

func (c *column) add(r Reading) {
	c.at = append(c.at, r.At)
	c.bits = append(c.bits, math.Float64bits(r.Value))
	c.stamped = append(c.stamped, r.Stamped)
	if r.Mark != 0 || c.marks != nil {
		c.marks = append(c.marks, make([]uint8, len(c.at)-len(c.marks))...)
		c.marks[len(c.at)-1] = r.Mark
	}
}

// mark is that of the i-th reading.
func (c *column) mark(i int) int {
	if c.marks == nil {
		return 0
	}
	return int(c.marks[i])
}

// noValue is the float of a marked reading without a value: it takes no room.
var noValue = math.Float64bits(math.NaN())

// none reports whether the i-th reading is marked and has no value.
func (c *column) none(i int) bool { return c.mark(i) != 0 && c.bits[i] == noValue }

// columnMarked is set in a column's first byte where any of its readings has a mark.
const columnMarked = 1 << 7

// columnHead is what precedes the coded part of a column. Values are those of the
// numbers base plus a whole number of steps.
type columnHead struct {
	ticks
	form form
	k    int
	base int64
	step int64
}

// columnModel is what writer and reader of a column both know of it so far.
type columnModel struct {
	regular             [2]bit // whether nothing but the value is to be told
	wasRegular          int
	stampChange         [2]bit
	wasStamped          int
	markChange          bit
	marks               [1 << 8]bit
	wasMark             int
	none                [2]bit // whether a reading with a mark has no value
	wasNone             int
	times, values, offs numbers
}

// appendColumn writes c, whose block's first instant is origin.
func appendColumn(b []byte, c *column, origin int64) []byte {
	h, whole := c.head()
	tick := byte(h.tick)
	if c.marks != nil {
		tick |= columnMarked
	}
	b = append(b, tick, byte(h.form)<<4|byte(h.k))
	b = appendInstant(b, h.start-origin)
	b = binary.AppendUvarint(b, zigzag(h.base))
	b = binary.AppendUvarint(b, uint64(h.step))
	begin := len(b)
	w := newBitWriter(b)
	var m columnModel
	var lastWhole int64
	for i := range c.at {
		stamped := 0
		if c.stamped[i] {
			stamped = 1
		}
		off := int64(0)
		if !c.none(i) {
			off = h.off(whole[i], c.bits[i])
		}
		m.put(&w, h.late(c.at[i]), stamped, off, c.mark(i), c.marks != nil)
		if m.wasMark != 0 && m.putNone(&w, c.none(i)) {
			continue
		}
		n := whole[i] - h.base
		if h.step != 0 {
			n /= h.step
		}
		m.values.put(&w, n-lastWhole)
		lastWhole = n
	}
	return w.finish(begin)
}

// put writes what of a reading is not its value.
func (m *columnModel) put(w *bitWriter, late int64, stamped int, off int64, mark int, marked bool) {
	regular := 0
	if late != 0 || off != 0 || stamped != m.wasStamped || mark != m.wasMark {
		regular = 1
	}
	w.put(regular, &m.regular[m.wasRegular])
	m.wasRegular = regular
	if regular == 0 {
		return
	}
	m.times.put(w, late)
	m.offs.put(w, off)
	w.put(stamped^m.wasStamped, &m.stampChange[m.wasStamped])
	m.wasStamped = stamped
	if !marked {
		return
	}
	if mark == m.wasMark {
		w.put(0, &m.markChange)
		return
	}
	w.put(1, &m.markChange)
	putTree(w, m.marks[:], mark, 8)
	m.wasMark = mark
}

// putNone writes whether a reading with a mark has no value.
func (m *columnModel) putNone(w *bitWriter, none bool) bool {
	is := 0
	if none {
		is = 1
	}
	w.put(is, &m.none[m.wasNone])
	m.wasNone = is
	return none
}

func (m *columnModel) getNone(r *bitReader) bool {
	m.wasNone = r.get(&m.none[m.wasNone])
	return m.wasNone != 0
}

func (m *columnModel) get(r *bitReader, marked bool) (late, off int64) {
	m.wasRegular = r.get(&m.regular[m.wasRegular])
	if m.wasRegular == 0 {
		return 0, 0
	}
	late, off = m.times.get(r), m.offs.get(r)
	m.wasStamped ^= r.get(&m.stampChange[m.wasStamped])
	if marked && r.get(&m.markChange) != 0 {
		m.wasMark = getTree(r, m.marks[:], 8)
	}
	return late, off
}

// off is how many floats a value lies beside that of its number.
func (h *columnHead) off(n int64, b uint64) int64 {
	if h.form == formBits {
		return 0
	}
	return apart(h.form.value(n, h.k), b)
}

// head looks through the column for what its readings have in common, and returns the
// number of each value.
func (c *column) head() (h columnHead, whole []int64) {
	h.ticks = ticksOf(c.at)
	values := c.values()
	h.form, h.k = formOf(values)
	whole = make([]int64, len(c.bits))
	last := int64(0)
	if n, ok := h.form.whole(math.Float64frombits(values[0]), h.k); ok && c.none(0) {
		last = n
	}
	for i, b := range c.bits {
		if h.form == formBits {
			whole[i] = int64(ordered(b))
			continue
		}
		if n, ok := h.form.whole(math.Float64frombits(b), h.k); ok {
			last = n
		}
		whole[i] = last
	}
	h.base = whole[0]
	if h.form == formBits {
		h.step = 1
		return h, whole
	}
	for _, n := range whole {
		if h.step != 1 {
			h.step = divisor(h.step, n-h.base)
		}
	}
	return h, whole
}

// values returns the bits of the values that there are, or of one where there is none.
func (c *column) values() []uint64 {
	if c.marks == nil {
		return c.bits
	}
	var all []uint64
	for i, b := range c.bits {
		if !c.none(i) {
			all = append(all, b)
		}
	}
	if all == nil {
		return []uint64{0}
	}
	return all
}

// divisor is the greatest that a and b have in common; both are less than 2^54.
func divisor(a, b int64) int64 {
	for b != 0 {
		a, b = b, a%b
	}
	return max(a, -a)
}

// parseColumn yields the count readings of a column until yield returns false. It needs no
// more memory however many they are. Bytes that no writer made give an error or
// any readings, never a panic.
func parseColumn(b []byte, count uint64, origin int64, tag uint32, yield func(Reading) bool) error {
	p := parser{rest: b}
	head := p.take(2)
	if p.bad || head[0]&^columnMarked > maxDigits || form(head[1]>>4) >= forms || head[1]&15 > maxDigits {
		return errRecord
	}
	h := columnHead{ticks: ticks{tick: int(head[0] &^ columnMarked)}, form: form(head[1] >> 4), k: int(head[1] & 15)}
	h.start = origin + p.instant()
	h.base = unzigzag(p.uvarint())
	h.step = int64(p.uvarint())
	if p.bad {
		return errRecord
	}
	marked := head[0]&columnMarked != 0
	r := newBitReader(p.rest)
	var m columnModel
	var n int64
	for range count {
		late, off := m.get(&r, marked)
		reading := Reading{Tag: tag, At: h.next(late), Stamped: m.wasStamped != 0, Mark: uint8(m.wasMark)}
		if m.wasMark != 0 && m.getNone(&r) {
			reading.Value = math.NaN()
		} else {
			n += m.values.get(&r)
			reading.Value = h.value(n, off)
		}
		if !yield(reading) {
			return nil
		}
	}
	return nil
}

func (h *columnHead) value(n, off int64) float64 {
	n = h.base + n*h.step
	if h.form == formBits {
		return math.Float64frombits(unordered(uint64(n)))
	}
	u := ordered(math.Float64bits(h.form.value(n, h.k)))
	return math.Float64frombits(unordered(u + uint64(off)))
}
