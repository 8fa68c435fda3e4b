package store

import (
	"encoding/binary"
	"math"
)

// byteRun is one way to write a value: all but the leading and trailing zero bytes.
type byteRun struct{ leading, count int }

// runs lists what the control byte's codes from 2 upwards stand for, and codeOf
// is its inverse.
var runs, codeOf = func() (list []byteRun, codes [8][8]byte) {
	for leading := 1; leading < 8; leading++ {
		for count := 1; count <= 8-leading; count++ {
			codes[leading][count] = byte(2 + len(list))
			list = append(list, byteRun{leading, count})
		}
	}
	return list, codes
}()

// parser takes a record apart. After the first fault it only says so.
type parser struct {
	rest []byte
	bad  bool
}

func (p *parser) uvarint() uint64 {
	u, n := binary.Uvarint(p.rest)
	if n <= 0 {
		p.bad, p.rest = true, nil
		return 0
	}
	p.rest = p.rest[n:]
	return u
}

func (p *parser) take(n uint64) []byte {
	if n > uint64(len(p.rest)) {
		p.bad, p.rest = true, nil
		return nil
	}
	b := p.rest[:n]
	p.rest = p.rest[n:]
	return b
}

// count reads how many parts follow, each of them at least size bytes long.
func (p *parser) count(size int) int {
	n := p.uvarint()
	if n > uint64(len(p.rest)/size) {
		p.bad, p.rest = true, nil
		return 0
	}
	return int(n)
}

func (p *parser) instant() int64 {
	u := p.uvarint()
	d := unzigzag(u>>1) * millisecond
	if u&1 == 0 {
		return d
	}
	r := p.uvarint()
	if r == 0 || r >= millisecond {
		p.bad = true
	}
	return d + int64(r)
}

// record reads the record numbered seq from the front of p and takes it into m.
func (p *parser) record(seq uint64, m *memory) ([]Beat, error) {
	body := p.take(p.uvarint())
	sum := p.take(4)
	if p.bad || binary.LittleEndian.Uint32(sum) != checksum(sequenceKey(seq), body) {
		return nil, errRecord
	}
	inner := parser{rest: body}
	beats := inner.beats(m)
	if inner.bad || len(inner.rest) != 0 {
		return nil, errRecord
	}
	return beats, nil
}

func (p *parser) beats(m *memory) []Beat {
	beats := make([]Beat, p.count(2))
	for i := range beats {
		beats[i].Through = m.through.foreseen() + p.instant()
		m.through.learn(beats[i].Through)
		if n := p.count(1); n > 0 {
			beats[i].Readings = make([]Reading, n)
		}
		for j := range beats[i].Readings {
			beats[i].Readings[j] = p.reading(m)
			if p.bad {
				return nil
			}
		}
	}
	return beats
}

func (p *parser) reading(m *memory) Reading {
	first := p.take(1)
	if p.bad {
		return Reading{}
	}
	control := first[0]
	r := Reading{Tag: m.foreseenTag(), Stamped: m.stamped != (control&controlStamped != 0)}
	if control&controlTag != 0 {
		tag := p.uvarint()
		if tag > math.MaxUint32 {
			p.bad = true
		}
		r.Tag = uint32(tag)
	}
	t := m.of(r.Tag)
	r.At = t.rhythm.foreseen()
	if control&controlTime != 0 {
		r.At += p.instant()
	}
	code := control & controlBytes
	r.Mark = t.mark
	if code == markCode {
		two := p.take(2)
		if p.bad || two[0] == t.mark {
			p.bad = true
			return Reading{}
		}
		r.Mark, code = two[0], two[1]
	}
	r.Value = math.Float64frombits(t.bits ^ p.word(code))
	m.learn(t, r)
	return r
}

// word reads the bytes of a value that code tells of.
func (p *parser) word(code byte) (word uint64) {
	switch {
	case code == 0:
		return 0
	case code == 1:
		if b := p.take(8); b != nil {
			return binary.LittleEndian.Uint64(b)
		}
		return 0
	case int(code)-2 >= len(runs):
		p.bad = true
		return 0
	}
	run := runs[code-2]
	for i, b := range p.take(uint64(run.count)) {
		word |= uint64(b) << (8 * i)
	}
	return word << (8 * (8 - run.leading - run.count))
}
