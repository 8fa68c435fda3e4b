package store

import (
	"cmp"
	"maps"
	"math"
	"slices"

	bolt "go.etcd.io/bbolt"
)

// minuteBlock takes a block of minutes, if any of it can be read; sure tells that it is one
// that was not removed, of which damage is to be told.
func (z *salvage) minuteBlock(e element, sure bool) error {
	if len(e.key) != 12 {
		return nil
	}
	block := z.raw.newWalk().records(e.value)
	if sure && len(z.damaged) < keysATrim &&
		minuteColumns(e.key, block, anyLoad, func(place, []byte) error { return nil }) != nil {
		z.damaged["m"+string(e.key)] = true
	}
	if _, _, err := minutePlaces(e.key, block); err != nil {
		return nil
	}
	z.blocks = append(z.blocks, keyed{nil, slices.Clone(e.key), slices.Clone(block)})
	return z.took(len(block))
}

// putBlock writes of a block the columns that can be read and of whose loads there are none
// yet.
func putBlock(tx *bolt.Tx, k keyed) error {
	type coded struct {
		at     place
		column []byte
	}
	var all []coded
	take := func(at place, column []byte) error {
		i, there := slices.BinarySearchFunc(all, at.tag, func(c coded, tag uint32) int { return cmp.Compare(c.at.tag, tag) })
		if !there {
			all = slices.Insert(all, i, coded{at, column})
		}
		return nil
	}
	key, old := minuteBlock(tx, keyTime(k.key), firstLoad(k.key))
	if old != nil {
		if err := minuteColumns(key, slices.Clone(old), anyLoad, take); err != nil {
			return err
		}
	}
	there := len(all)
	_ = minuteColumns(k.key, k.value, anyLoad, take) // damage has been told
	if len(all) == there {
		return nil
	}
	w := newBlockWriter(k.key)
	for _, c := range all {
		w.add(c.at.tag, c.at.count, c.column)
	}
	return putMinuteBlock(tx, k.key, w.block())
}

// fill writes those minutes under a key of an earlier state that are not there yet.
func (z *salvage) fill(tx *bolt.Tx, k keyed) error {
	if tx.Bucket(bucketMinutes).Get(k.key) != nil {
		return nil
	}
	found, err := parseMinutes(nil, k.key, k.value, anyLoad)
	if err != nil {
		return err
	}
	sealed := false
	missing := found[:0]
	for _, m := range found {
		there, has := z.sealed.has(tx, m)
		if sealed = sealed || has; !there {
			missing = append(missing, m)
		}
	}
	switch {
	case len(missing) == 0:
		return nil
	case sealed:
		s := &Store{path: z.db.Path(), db: z.db, log: discard()}
		return s.putMinutes(tx, missing)
	}
	return tx.Bucket(bucketMinutes).Put(k.key, k.value)
}

// sealedStarts knows when the minutes begin that blocks of one span hold.
type sealedStarts struct {
	span   int64
	looked map[uint32]bool    // by first load of a key: whether there is a block
	starts map[uint32][]int64 // by load
}

func (z *sealedStarts) reset(span int64) {
	*z = sealedStarts{span, map[uint32]bool{}, map[uint32][]int64{}}
}

// has tells whether the block of m holds it, and whether there is one.
func (z *sealedStarts) has(tx *bolt.Tx, m Minute) (there, block bool) {
	if span := spanOf(m.Start); z.starts == nil || span != z.span {
		z.reset(span)
	}
	first := m.Load / loadsAKey * loadsAKey
	if _, ok := z.looked[first]; !ok {
		key, b := minuteBlock(tx, m.Start, m.Load)
		z.looked[first] = b != nil
		if b != nil {
			_ = minuteColumns(key, b, anyLoad, func(at place, column []byte) error { // all are as they were written
				instants, _, err := parseStarts(column, at.count, z.span)
				z.starts[at.tag] = instants
				return err
			})
		}
	}
	_, there = slices.BinarySearch(z.starts[m.Load], m.Start)
	return there, z.looked[first]
}

// countMinutes counts all minutes, and those that hours hold beyond them.
type countMinutes struct {
	walk   *minuteWalk
	report *Report
	hour   int64
	there  map[hourPlace]uint32 // from that hour on
}

func newCountMinutes(s *Store, tx *bolt.Tx, r *Report) *countMinutes {
	return &countMinutes{s.newMinuteWalk(tx, math.MinInt64), r, math.MinInt64, map[hourPlace]uint32{}}
}

// until counts minutes up to an hour and perhaps some more, of any load.
func (c *countMinutes) until(hour int64, all bool) {
	if hour > c.hour {
		c.hour = hour
		maps.DeleteFunc(c.there, func(at hourPlace, _ uint32) bool { return at.start < hour })
	}
	for !c.walk.end && (all || c.walk.start() <= hour) {
		c.walk.stretch(math.MaxInt64, anyLoad, func(m *Minute) {
			c.report.Minutes.add(1, m.Start, m.Start)
			if at := hourOf(m.Start); at >= hour {
				c.there[hourPlace{at, m.Load}]++
			}
		}, func(uint32) {})
	}
}
