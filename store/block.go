package store

import (
	"encoding/binary"
	"maps"
	"slices"
)

// columns are readings by tag.
type columns map[uint32]*column

func (c columns) add(r Reading) {
	of := c[r.Tag]
	if of == nil {
		of = &column{}
		c[r.Tag] = of
	}
	of.add(r)
}

func (c columns) tags() []uint32 { return slices.Sorted(maps.Keys(c)) }

// blockWriter makes a block of columns, which are added by growing tag or load.
type blockWriter struct {
	key     []byte // that its checksums are of
	columns int
	before  uint32 // the tag before
	head    []byte
	body    []byte
}

func newBlockWriter(key []byte) *blockWriter { return &blockWriter{key: key} }

// add adds a column of count readings or minutes.
func (w *blockWriter) add(tag uint32, count uint64, column []byte) {
	begin := len(w.body)
	w.body = append(w.body, column...)
	w.body = binary.LittleEndian.AppendUint32(w.body, checksum(columnKey(w.key, tag), column))
	w.head = binary.AppendUvarint(w.head, uint64(tag-w.before))
	w.head = binary.AppendUvarint(w.head, count)
	w.head = binary.AppendUvarint(w.head, uint64(len(w.body)-begin))
	w.before = tag
	w.columns++
}

func (w *blockWriter) block() []byte {
	b := binary.AppendUvarint(nil, uint64(w.columns))
	b = append(b, w.head...)
	b = binary.LittleEndian.AppendUint32(b, checksum(w.key, b))
	return append(b, w.body...)
}

// headKey leaves out the name's own checksum, behind which the checksum of any name
// would be the same.
func headKey(name []byte) []byte { return name[:nameBytes-4] }

func columnKey(key []byte, tag uint32) []byte {
	return binary.LittleEndian.AppendUint32(slices.Clone(key), tag)
}

// place is where a column lies in its block.
type place struct {
	tag           uint32
	count, length uint64
}

// places takes the head off the front of a block whose checksums are of key.
func (p *parser) places(key []byte) ([]place, error) {
	whole := p.rest
	all := make([]place, p.count(3))
	tag := uint64(0)
	for i := range all {
		tag += p.uvarint()
		all[i] = place{uint32(tag), p.uvarint(), p.uvarint()}
		if p.bad || tag > 1<<32-1 || i > 0 && tag == uint64(all[i-1].tag) {
			return nil, errRecord
		}
	}
	head := whole[:len(whole)-len(p.rest)]
	sum := p.take(4)
	if p.bad || binary.LittleEndian.Uint32(sum) != checksum(key, head) {
		return nil, errRecord
	}
	return all, nil
}

// column takes a column off the front and returns it without its checksum, nil where it is
// damaged.
func (p *parser) column(key []byte, at place) []byte {
	b := p.take(at.length)
	n := len(b) - 4
	if p.bad || n < 0 || binary.LittleEndian.Uint32(b[n:]) != checksum(columnKey(key, at.tag), b[:n]) {
		return nil
	}
	return b[:n]
}

// eachReading calls f with the readings of a tag in the block named name, until f
// returns false.
func eachReading(name, block []byte, tag uint32, f func(Reading) bool) error {
	s, err := parseName(name)
	if err != nil {
		return err
	}
	p := parser{rest: block}
	all, err := p.places(headKey(name))
	if err != nil {
		return err
	}
	for _, at := range all {
		if at.tag != tag {
			p.take(at.length)
			continue
		}
		b := p.column(headKey(name), at)
		if b == nil {
			return errRecord
		}
		return parseColumn(b, at.count, s.earliest, tag, f)
	}
	if p.bad {
		return errRecord
	}
	return nil
}
