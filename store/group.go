package store

import (
	"encoding/binary"
	"fmt"
	"math"

	bolt "go.etcd.io/bbolt"
)

// defaultGroup is how many bytes of records a group holds before it is closed.
const defaultGroup = 48 << 10

// nameBytes is the length of a closed group's name.
const nameBytes = 40

// appendFill is the share of a page that append-only keys may fill. bbolt does
// not store it, so that each transaction sets it again.
const appendFill = 0.95

// span says what a group covers: the numbers of its records, the times of all
// beats and readings, and how many readings there are.
type span struct {
	first, last      uint64
	earliest, latest int64
	readings         uint32
}

func newSpan(first uint64) span {
	return span{first: first, last: first - 1, earliest: math.MaxInt64, latest: math.MinInt64}
}

func (s *span) add(beats []Beat) {
	s.last++
	for _, b := range beats {
		s.cover(b.Through)
		for _, r := range b.Readings {
			s.cover(r.At)
		}
		s.readings += uint32(len(b.Readings))
	}
}

func (s *span) cover(t int64) {
	s.earliest, s.latest = min(s.earliest, t), max(s.latest, t)
}

// overlaps tells whether the group may hold something in [from, to).
func (s *span) overlaps(from, to int64) bool { return s.latest >= from && s.earliest < to }

// name is what a closed group is called in the journal.
func (s *span) name() []byte {
	b := sequenceKey(s.first)
	b = binary.LittleEndian.AppendUint64(b, s.last)
	b = binary.LittleEndian.AppendUint64(b, uint64(s.earliest))
	b = binary.LittleEndian.AppendUint64(b, uint64(s.latest))
	b = binary.LittleEndian.AppendUint32(b, s.readings)
	return binary.LittleEndian.AppendUint32(b, checksum(nil, b))
}

func parseName(b []byte) (span, error) {
	if len(b) != nameBytes || binary.LittleEndian.Uint32(b[36:]) != checksum(nil, b[:36]) {
		return span{}, errRecord
	}
	return span{
		first:    binary.BigEndian.Uint64(b),
		last:     binary.LittleEndian.Uint64(b[8:]),
		earliest: int64(binary.LittleEndian.Uint64(b[16:])),
		latest:   int64(binary.LittleEndian.Uint64(b[24:])),
		readings: binary.LittleEndian.Uint32(b[32:]),
	}, nil
}

// putRecords stores a long run of records in a bucket of its own under name.
// As a plain value it would be written again with each of the next few, because
// bbolt keeps two keys and more in every page.
func putRecords(b *bolt.Bucket, name, records []byte) error {
	b.FillPercent = appendFill
	own, err := b.CreateBucket(name)
	if err != nil {
		return err
	}
	return own.Put(keyRecords, records)
}

// openGroup is the group that still grows: what of it lies in recent, and its
// tail, which lies inside the root's page.
type openGroup struct {
	span
	memory      *memory
	recentBytes int
	tailFirst   uint64 // number of the first record in tail
	tail        []byte
}

func newOpenGroup(first uint64) *openGroup {
	return &openGroup{span: newSpan(first), memory: newMemory(), tailFirst: first}
}

// add writes beats as the next record.
func (g *openGroup) add(tx *bolt.Tx, beats []Beat, pieceBytes, groupBytes int) error {
	g.tail = appendRecord(g.tail, g.last+1, beats, g.memory)
	g.span.add(beats)
	switch {
	case g.recentBytes+len(g.tail) >= groupBytes:
		return g.close(tx)
	case len(g.tail) > tails*pieceBytes:
		return g.flush(tx)
	}
	return putTail(tx, g.tail, pieceBytes)
}

// flush moves the tail to recent.
func (g *openGroup) flush(tx *bolt.Tx) error {
	if err := putRecords(tx.Bucket(bucketRecent), sequenceKey(g.tailFirst), g.tail); err != nil {
		return err
	}
	g.recentBytes += len(g.tail)
	g.tail, g.tailFirst = nil, g.last+1
	return putTail(tx, nil, 1)
}

// close writes the whole group to journal and begins a new one.
func (g *openGroup) close(tx *bolt.Tx) error {
	records := append(recentRecords(tx), g.tail...)
	if err := putRecords(tx.Bucket(bucketJournal), g.name(), records); err != nil {
		return err
	}
	if g.recentBytes > 0 {
		if err := tx.DeleteBucket(bucketRecent); err != nil {
			return err
		}
		if _, err := tx.CreateBucket(bucketRecent); err != nil {
			return err
		}
	}
	*g = *newOpenGroup(g.last + 1)
	return putTail(tx, nil, 1)
}

// recentRecords returns what of the open group lies in recent.
func recentRecords(tx *bolt.Tx) (b []byte) {
	recent := tx.Bucket(bucketRecent)
	c := recent.Cursor()
	for k, v := c.First(); k != nil; k, v = c.Next() {
		if v == nil {
			b = append(b, recent.Bucket(k).Get(keyRecords)...)
		}
	}
	return b
}

// putTail cuts b into pieces, one for each tail bucket.
func putTail(tx *bolt.Tx, b []byte, pieceBytes int) error {
	for i := range tails {
		bucket := tx.Bucket(bucketTail(i))
		n := min(len(b), pieceBytes)
		if n == 0 {
			if err := bucket.Delete(keyRecords); err != nil {
				return err
			}
			continue
		}
		if err := bucket.Put(keyRecords, b[:n]); err != nil {
			return err
		}
		b = b[n:]
	}
	return nil
}

func tailRecords(tx *bolt.Tx) (b []byte) {
	for i := range tails {
		b = append(b, tx.Bucket(bucketTail(i)).Get(keyRecords)...)
	}
	return b
}

// loadOpen reads the open group back, and with it the memory of the writer.
func loadOpen(tx *bolt.Tx) (*openGroup, error) {
	first := uint64(1)
	if k := newGroupCursor(tx).last(); k != nil {
		closed, err := parseName(k)
		if err != nil {
			return nil, fmt.Errorf("last closed group: %w", err)
		}
		first = closed.last + 1
	}
	g := newOpenGroup(first)
	recent := recentRecords(tx)
	g.recentBytes = len(recent)
	if err := g.replay(recent); err != nil {
		return nil, err
	}
	g.tailFirst = g.last + 1
	g.tail = tailRecords(tx)
	return g, g.replay(g.tail)
}

func (g *openGroup) replay(records []byte) error {
	p := parser{rest: records}
	for len(p.rest) > 0 {
		beats, err := p.record(g.last+1, g.memory)
		if err != nil {
			return fmt.Errorf("record %d: %w", g.last+1, err)
		}
		g.span.add(beats)
	}
	return nil
}
