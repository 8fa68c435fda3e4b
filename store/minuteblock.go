package store

import (
	"bytes"
	"encoding/binary"
	"math"
	"slices"

	bolt "go.etcd.io/bbolt"
)

// sealedSpan is how much time a block of minutes covers: long enough for its columns to be
// short, and short enough for a single minute to be read at once.
const sealedSpan = 6 * hourNanos

// spanOf returns the start of the span of blocks that holds t, spanAfter that of the next.
func spanOf(t int64) int64       { return floorTo(t, sealedSpan) }
func spanAfter(span int64) int64 { return nextOf(span, sealedSpan) }

// minuteBlocks returns the bucket of the blocks of minutes.
func minuteBlocks(tx *bolt.Tx) *bolt.Bucket { return tx.Bucket(bucketMinutes).Bucket(keyPlaceholder) }

// minuteBlock returns the block of a key of minutes, with the key that it lies under; it is
// nil where there is none.
func minuteBlock(tx *bolt.Tx, start int64, load uint32) (key, block []byte) {
	key = minuteKey(spanOf(start), load)
	if own := minuteBlocks(tx).Bucket(key); own != nil {
		return key, own.Get(keyRecords)
	}
	return key, nil
}

// putMinuteBlock writes a block, or replaces it.
func putMinuteBlock(tx *bolt.Tx, key, block []byte) error {
	blocks := minuteBlocks(tx)
	if blocks.Bucket(key) != nil {
		if err := blocks.DeleteBucket(key); err != nil {
			return err
		}
	}
	return putRecords(blocks, key, block)
}

// minutePlaces takes the head off a block of minutes, whose key must be that of all of its
// loads.
func minutePlaces(key, block []byte) (all []place, p parser, err error) {
	p.rest = block
	if len(key) != 12 {
		return nil, p, errRecord
	}
	if all, err = p.places(key); err != nil {
		return nil, p, err
	}
	for _, at := range all {
		if at.tag/loadsAKey != binary.BigEndian.Uint32(key[8:]) {
			return nil, p, errRecord
		}
	}
	return all, p, nil
}

// minuteColumns calls f with the columns in a block of the loads that are wanted. Where the
// block or any of these is damaged the error tells so, after those that are not.
func minuteColumns(key, block []byte, want func(load uint32) bool, f func(at place, column []byte) error) (err error) {
	all, p, err := minutePlaces(key, block)
	if err != nil {
		return err
	}
	for _, at := range all {
		if !want(at.tag) {
			p.take(at.length)
			continue
		}
		column := p.column(key, at)
		if column == nil {
			err = errRecord
		} else if bad := f(at, column); bad != nil {
			err = bad
		}
	}
	if p.bad {
		return errRecord
	}
	return err
}

// parseMinuteBlock adds to all the minutes in a block of the loads that are wanted, by load
// and start. Those that are damaged are left out and told by an error.
func parseMinuteBlock(all []Minute, key, block []byte, want func(load uint32) bool) ([]Minute, error) {
	err := minuteColumns(key, block, want, func(at place, column []byte) (err error) {
		all, err = parseMinuteColumn(all, column, at.count, keyTime(key), at.tag)
		return err
	})
	return all, err
}

// lastColumn is the column of minutes that was read last. Hours of it are mostly asked for one
// after the other, and each would have to decode the whole of it again.
type lastColumn struct {
	key     string
	at      place
	sum     uint32
	minutes []Minute
}

// loadMinutes is parseMinuteBlock for one load, by way of the column that was read last.
func (s *Store) loadMinutes(all []Minute, key, block []byte, load uint32) ([]Minute, error) {
	err := minuteColumns(key, block, func(l uint32) bool { return l == load }, func(at place, column []byte) (err error) {
		is := lastColumn{key: string(key), at: at, sum: checksum(key, column)}
		if last := s.lately.Load(); last != nil && last.key == is.key && last.at == is.at && last.sum == is.sum {
			all = append(all, last.minutes...)
			return nil
		}
		if is.minutes, err = parseMinuteColumn(nil, column, at.count, keyTime(key), load); err == nil {
			s.lately.Store(&is)
			all = append(all, is.minutes...)
		}
		return err
	})
	return all, err
}

// blockReader adds to all what is wanted of a block of minutes.
type blockReader func(all []Minute, key, block []byte) ([]Minute, error)

func (s *Store) ofLoad(load uint32) (want func(uint32) bool, read blockReader) {
	return func(l uint32) bool { return l == load }, func(all []Minute, key, block []byte) ([]Minute, error) {
		return s.loadMinutes(all, key, block, load)
	}
}

func ofLoads(want func(load uint32) bool) blockReader {
	return func(all []Minute, key, block []byte) ([]Minute, error) {
		return parseMinuteBlock(all, key, block, want)
	}
}

// spanMinutes adds to all the minutes with from <= Start <= last, within one span, of the
// wanted loads that share a key with the load named, by start. What lies under a key of its
// own stands before what the block holds under that key, whether or not it can be read.
func (s *Store) spanMinutes(tx *bolt.Tx, all []Minute, load uint32, from, last int64, want func(uint32) bool, read blockReader) (_ []Minute, faults []error) {
	begin := len(all)
	var apart []int64 // starts of the keys
	c := loadCursor{tx.Bucket(bucketMinutes).Cursor(), load / loadsAKey}
	for k, v := c.seek(from); k != nil && keyTime(k) <= last; k, v = c.next() {
		var err error
		if all, err = parseMinutes(all, k, v, want); err != nil {
			faults = append(faults, s.damage("minutes", k, err))
		}
		apart = append(apart, keyTime(k))
	}
	key, block := minuteBlock(tx, from, load)
	if block == nil {
		return all, faults
	}
	sealed := len(all)
	all, err := read(all, key, block)
	if err != nil {
		faults = append(faults, s.damage("sealed minutes", key, err))
	}
	keep := slices.DeleteFunc(all[sealed:], func(m Minute) bool {
		if m.Start < from || m.Start > last {
			return true
		}
		_, again := slices.BinarySearch(apart, m.Start)
		return again
	})
	all = all[:sealed+len(keep)]
	if sealed > begin {
		slices.SortStableFunc(all[begin:], byStart)
	}
	return all, faults
}

func byStart(a, b Minute) int {
	switch {
	case a.Start < b.Start:
		return -1
	case a.Start > b.Start:
		return 1
	}
	return 0
}

// lastBefore is the last instant before the next hour or span, which there is not always.
func lastBefore(next int64) int64 {
	if next == math.MaxInt64 {
		return next
	}
	return next - 1
}

// nextMinute returns when the next minute of the load, or of one that shares its key, begins
// from some instant on. Of sealed ones it is only told that it is not before that.
func nextMinute(tx *bolt.Tx, from int64, load uint32) (at int64, ok bool) {
	c := loadCursor{tx.Bucket(bucketMinutes).Cursor(), load / loadsAKey}
	if k, _ := c.seek(from); k != nil {
		at, ok = keyTime(k), true
	}
	c = loadCursor{minuteBlocks(tx).Cursor(), load / loadsAKey}
	if k, _ := c.seek(spanOf(from)); k != nil {
		if sealed := max(from, keyTime(k)); !ok || sealed < at {
			at, ok = sealed, true
		}
	}
	return at, ok
}

// firstMinute returns an instant before which there are no minutes; ok is false where there
// are none at all.
func firstMinute(tx *bolt.Tx) (at int64, ok bool) {
	at = math.MaxInt64
	if k, _ := tx.Bucket(bucketMinutes).Cursor().Seek(keyFirstMinute); len(k) == 12 {
		at, ok = keyTime(k), true
	}
	if k, _ := minuteBlocks(tx).Cursor().First(); len(k) == 12 {
		at, ok = min(at, keyTime(k)), true
	}
	return at, ok
}

// lastHour returns the start of the hour that holds the newest minute, or of the first
// after all that are sealed, whose hours are over.
func lastHour(tx *bolt.Tx) (start int64, ok bool) {
	start = math.MinInt64
	if k, _ := tx.Bucket(bucketMinutes).Cursor().Last(); len(k) == 12 {
		start, ok = hourOf(keyTime(k)), true
	}
	if k, _ := minuteBlocks(tx).Cursor().Last(); len(k) == 12 {
		start, ok = max(start, spanAfter(keyTime(k))), true
	}
	return start, ok
}

// sealedKeys returns the blocks of a span, by load.
func sealedKeys(tx *bolt.Tx, span int64) (keys [][]byte) {
	c := minuteBlocks(tx).Cursor()
	for k, _ := c.Seek(minuteKey(span, 0)); len(k) == 12 && keyTime(k) == span; k, _ = c.Next() {
		keys = append(keys, bytes.Clone(k))
	}
	return keys
}
