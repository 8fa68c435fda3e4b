package store

import "math"

// memory is what writer and reader of a group both know from the records before:
// from it they foresee the next reading.
type memory struct {
	through rhythm
	tag     uint32
	at      int64
	stamped bool
	tags    map[uint32]*tagMemory
}

type tagMemory struct {
	rhythm rhythm
	bits   uint64 // of the last value
	mark   uint8  // of the last reading
	next   uint32 // the tag that followed last
}

func newMemory() *memory { return &memory{tags: map[uint32]*tagMemory{}} }

func (m *memory) foreseenTag() uint32 {
	if t := m.tags[m.tag]; t != nil {
		return t.next
	}
	return m.tag + 1
}

// of returns the memory of a tag, and makes one for a tag that is new.
func (m *memory) of(tag uint32) *tagMemory {
	t := m.tags[tag]
	if t == nil {
		t = &tagMemory{rhythm: rhythm{last: m.at}, next: tag + 1}
		m.tags[tag] = t
	}
	return t
}

// learn takes in a reading of the tag that t remembers.
func (m *memory) learn(t *tagMemory, r Reading) {
	if before := m.tags[m.tag]; before != nil {
		before.next = r.Tag
	}
	t.rhythm.learn(r.At)
	t.bits, t.mark = math.Float64bits(r.Value), r.Mark
	m.tag, m.at, m.stamped = r.Tag, r.At, r.Stamped
}

// rhythm foresees the next of a run of instants. Sums wrap around, and so lose
// nothing at the ends of int64.
type rhythm struct {
	last, step int64
	seen       bool
}

func (r *rhythm) foreseen() int64 { return r.last + r.step }

// learn takes in an instant; the first one tells no step yet.
func (r *rhythm) learn(at int64) {
	if r.seen {
		r.step = at - r.last
	}
	r.last, r.seen = at, true
}
