package store

import (
	"bytes"
	"cmp"
	"encoding/binary"
	"iter"
	"maps"
	"math"
	"slices"
	"sort"

	bolt "go.etcd.io/bbolt"
)

// keysAStep bounds how many keys of minutes one commit builds hours from, but for
// the last of these hours. It does no more than one hour unless the file is an old one.
const keysAStep = 2048

// hourMark says which hours are kept as records: those that begin before built.
// Later ones are told from their minutes. Of hours before trimmed, minutes may be gone.
type hourMark struct{ built, trimmed int64 }

var unbuilt = hourMark{math.MinInt64, math.MinInt64}

func putHourMark(tx *bolt.Tx, m hourMark) error {
	b := binary.LittleEndian.AppendUint64(nil, uint64(m.built))
	b = binary.LittleEndian.AppendUint64(b, uint64(m.trimmed))
	return tx.Bucket(bucketMeta).Put(keyHours, binary.LittleEndian.AppendUint32(b, checksum(keyHours, b)))
}

// readHourMark returns ok false where the mark is damaged, and then one by which all
// hours are built again: those before the end of the first hour that has minutes may have
// lost some.
func readHourMark(tx *bolt.Tx) (m hourMark, ok bool) {
	v := tx.Bucket(bucketMeta).Get(keyHours)
	if len(v) == 20 && binary.LittleEndian.Uint32(v[16:]) == checksum(keyHours, v[:16]) {
		return hourMark{int64(binary.LittleEndian.Uint64(v)), int64(binary.LittleEndian.Uint64(v[8:]))}, true
	}
	m = unbuilt
	if first, ok := firstMinute(tx); ok {
		m.trimmed = hourAfter(hourOf(first))
	}
	return m, false
}

// hourMark is readHourMark for what writes: a damaged mark is counted, and made good.
func (s *Store) hourMark(tx *bolt.Tx) (hourMark, error) {
	m, ok := readHourMark(tx)
	if ok {
		return m, nil
	}
	s.torn = append(s.torn, s.damage("mark of the hours, now made again,", keyHours, errRecord))
	return m, putHourMark(tx, m)
}

// putHours keeps the hours up to date with their minutes, of which changed have just
// been written: an hour that is over is built, one that was built before is
// built anew.
func (s *Store) putHours(tx *bolt.Tx, changed []Minute) error {
	mark, err := s.hourMark(tx)
	if err != nil {
		return err
	}
	late := map[int64]map[uint32]bool{}
	for _, m := range changed {
		if start := hourOf(m.Start); start < mark.built {
			if late[start] == nil {
				late[start] = map[uint32]bool{}
			}
			late[start][m.Load] = true
		}
	}
	for _, start := range slices.Sorted(maps.Keys(late)) {
		s.widen(tx, start, late[start])
		w := s.newMinuteWalk(tx, start)
		if w.end || w.start() != start {
			continue
		}
		if err := s.buildHours(w, mark, hourAfter(start), func(load uint32) bool { return late[start][load] }); err != nil {
			return err
		}
	}
	return s.advanceHours(tx, mark, keysAStep)
}

// widen adds to the loads whose hour is built anew those whose hour lies under the same
// key and cannot be read.
func (s *Store) widen(tx *bolt.Tx, start int64, loads map[uint32]bool) {
	for _, load := range slices.Sorted(maps.Keys(loads)) {
		key := minuteKey(start, load)
		if old := tx.Bucket(bucketHours).Get(key); old != nil {
			if _, err := parseHours(nil, key, old, anyLoad); err != nil {
				for i := range uint32(loadsAKey) {
					loads[load/loadsAKey*loadsAKey+i] = true
				}
			}
		}
	}
}

// advanceHours builds hours that are over, from some keys or a few more.
func (s *Store) advanceHours(tx *bolt.Tx, mark hourMark, keys int) error {
	end, ok := lastHour(tx)
	if !ok || end <= mark.built {
		return nil
	}
	w := s.newMinuteWalk(tx, mark.built)
	for w.passed < keys && !w.end && w.start() < end {
		if err := s.buildHours(w, mark, end, anyLoad); err != nil {
			return err
		}
	}
	mark.built = end
	if !w.end {
		mark.built = min(end, w.start())
	}
	return putHourMark(tx, mark)
}

// hourPlace tells hours apart.
type hourPlace struct {
	start int64
	load  uint32
}

// buildHours adds up the hours of the next stretch of w, of the loads that are wanted.
// Minutes that cannot be read are not in them: the store tells of these once the hours are
// written.
func (s *Store) buildHours(w *minuteWalk, mark hourMark, until int64, want func(load uint32) bool) error {
	sums := map[hourPlace]*hourSum{}
	torn := map[uint32]bool{} // blocks of loads
	w.torn = nil
	w.stretch(until, want, func(m *Minute) {
		at := hourPlace{hourOf(m.Start), m.Load}
		if sums[at] == nil {
			sums[at] = &hourSum{}
		}
		sums[at].add(m)
	}, func(load uint32) { torn[load/loadsAKey] = true })
	s.torn = append(s.torn, w.torn...)
	hours := make([]Hour, 0, len(sums))
	for _, at := range slices.SortedFunc(maps.Keys(sums), func(a, b hourPlace) int {
		return cmp.Or(cmp.Compare(a.start, b.start), cmp.Compare(a.load, b.load))
	}) {
		hours = append(hours, sums[at].hour())
	}
	return s.putHour(w.tx, mark, hours, torn)
}

// putHour writes hours, sorted by start and load. Those that cannot be read
// under a key that is written make place and are counted.
func (s *Store) putHour(tx *bolt.Tx, mark hourMark, hours []Hour, torn map[uint32]bool) error {
	bucket := tx.Bucket(bucketHours)
	bucket.FillPercent = appendFill
	for len(hours) > 0 {
		key := minuteKey(hours[0].Start, hours[0].Load)
		n := sort.Search(len(hours), func(i int) bool {
			return hours[i].Start > hours[0].Start || hours[i].Load/loadsAKey > hours[0].Load/loadsAKey
		})
		var all []Hour
		if old := bucket.Get(key); old != nil {
			var err error
			if all, err = parseHours(nil, key, old, anyLoad); err != nil {
				s.torn = append(s.torn, s.damage("hours, now replaced,", key, err))
				all = nil
			}
		}
		all = mark.merge(all, hours[:n], torn[hours[0].Load/loadsAKey])
		if err := bucket.Put(key, appendHours(nil, key, all)); err != nil {
			return err
		}
		hours = hours[n:]
	}
	return nil
}

// merge puts fresh hours among all. One that was built when more of its minutes were
// there, or could be read, stays; where it is not known which minutes are gone, so does one
// of as many.
func (mark hourMark) merge(all, fresh []Hour, torn bool) []Hour {
	for _, h := range fresh {
		i := sort.Search(len(all), func(i int) bool { return all[i].Load >= h.Load })
		switch {
		case i == len(all) || all[i].Load != h.Load:
			all = slices.Insert(all, i, h)
		case h.Minutes > all[i].Minutes || h.Minutes == all[i].Minutes && h.Start >= mark.trimmed && !torn:
			all[i] = h
		}
	}
	return all
}

// Hours yields the hours of a load with from <= Start < to, by Start. The hours
// that are not over yet, and those of a file of an older layout that are not
// built yet, are added up from the minutes there are. The store may be written to
// meanwhile. Damaged hours are told as an error and passed over unless the caller
// stops, and so are damaged minutes of those that are added up, which [Store.Damaged] counts
// once their hour is over.
func (s *Store) Hours(load uint32, from, to int64) iter.Seq2[Hour, error] {
	return func(yield func(Hour, error) bool) {
		if hourOf(from) != from {
			from = hourAfter(from)
		}
		var found []Hour
		for from < to {
			var faults []error
			found, faults, from = s.hoursFrom(found[:0], from, to, load)
			for _, h := range found {
				if !yield(h, nil) {
					return
				}
			}
			for _, err := range faults {
				if !yield(Hour{}, err) {
					return
				}
			}
		}
	}
}

// hoursFrom adds some hours to found. next is where to go on, to or later at the end.
func (s *Store) hoursFrom(found []Hour, from, to int64, load uint32) (all []Hour, faults []error, next int64) {
	all, next = found, to
	err := s.view(func(tx *bolt.Tx) error {
		if mark, _ := readHourMark(tx); from < mark.built {
			all, faults, next = s.builtFrom(tx, all, from, min(to, mark.built), load)
		} else {
			all, faults, next = s.unbuiltFrom(tx, all, from, to, load)
		}
		return nil
	})
	if err != nil {
		return all, append(faults, err), to
	}
	return all, faults, next
}

// builtFrom reads records of hours.
func (s *Store) builtFrom(tx *bolt.Tx, all []Hour, from, to int64, load uint32) (_ []Hour, faults []error, next int64) {
	c := loadCursor{tx.Bucket(bucketHours).Cursor(), load / loadsAKey}
	k, v := c.seek(from)
	for range hoursAView {
		if k == nil {
			return all, faults, to
		}
		beyond := keyTime(k) >= to // the end, unless the key itself is damaged
		var err error
		all, err = parseHours(all, k, v, func(l uint32) bool { return l == load && !beyond })
		switch {
		case err != nil:
			faults = append(faults, s.damage("hours", k, err))
		case beyond:
			return all, faults, to
		}
		k, v = c.next()
	}
	if k == nil {
		return all, faults, to
	}
	return all, faults, keyTime(k)
}

// unbuiltFrom adds up the next hour from its minutes.
func (s *Store) unbuiltFrom(tx *bolt.Tx, all []Hour, from, to int64, load uint32) (_ []Hour, faults []error, next int64) {
	at, ok := nextMinute(tx, from, load)
	start := hourOf(at)
	if !ok || start >= to {
		return all, nil, to
	}
	want, read := s.ofLoad(load)
	minutes, faults := s.spanMinutes(tx, nil, load, at, lastBefore(hourAfter(start)), want, read)
	var sum hourSum
	for i := range minutes {
		sum.add(&minutes[i])
	}
	if sum.Minutes > 0 {
		all = append(all, sum.hour())
	}
	return all, faults, hourAfter(start)
}

// keyTime is the instant in a key of minutes or hours.
func keyTime(key []byte) int64 { return int64(binary.BigEndian.Uint64(key) ^ 1<<63) }

// loadCursor goes through those keys of minutes or hours that hold one block of loads.
type loadCursor struct {
	*bolt.Cursor
	block uint32
}

func (c loadCursor) seek(from int64) (k, v []byte) {
	return c.settle(c.Seek(minuteKey(from, c.block*loadsAKey)))
}

func (c loadCursor) next() (k, v []byte) { return c.settle(c.Cursor.Next()) }

// near is how many keys settle goes by one by one before it searches, which takes as
// long as twenty of them.
const near = 8

// settle goes on from k to the first key of the block.
func (c loadCursor) settle(k, v []byte) ([]byte, []byte) {
	for n := 0; len(k) == 12 && binary.BigEndian.Uint32(k[8:]) != c.block; n++ {
		if n < near {
			k, v = c.Next()
			continue
		}
		at := keyTime(k)
		if binary.BigEndian.Uint32(k[8:]) > c.block {
			if at == math.MaxInt64 {
				return nil, nil
			}
			at++
		}
		k, v = c.Seek(minuteKey(at, c.block*loadsAKey))
	}
	if bytes.Equal(k, keyPlaceholder) {
		return nil, nil
	}
	return k, v
}
