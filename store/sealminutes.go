package store

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"time"

	bolt "go.etcd.io/bbolt"
)

const (
	// sealMinutesAfter is how old the last minute of a span must be for it to be sealed, by
	// when late minutes have come.
	sealMinutesAfter = 3 * time.Hour

	// Of the work there is, each commit does a step, and more for the minutes that it
	// brings: sealMinutesShare for each, in minutes that are sealed.
	sealMinutesShare = 2
	// keysAStepGone is how many keys of minutes a step removes at most.
	keysAStepGone = 1024
)

// minuteSealer moves minutes into blocks, a span after the other, a little with each commit:
// first each block is written, and then the keys go whose minutes are in one. Until then these
// stand before the blocks, so that a reader finds each minute once at any time, and after a
// kill the span is just sealed again.
type minuteSealer struct {
	after  int64 // sealMinutesAfter in ns
	next   int64 // where the minutes begin that have not been looked at
	newest int64 // Start of the newest minute in the last batch that had any

	busy    bool // with a span
	span    int64
	loads   []uint32        // a load of each key whose block is to be written
	spared  map[uint32]bool // loads of keys whose minutes stay as they are
	removed []byte          // the last key that was looked at to be removed
	failed  bool            // a failure has been logged
}

func newMinuteSealer() minuteSealer {
	return minuteSealer{after: int64(sealMinutesAfter), next: math.MinInt64, newest: math.MinInt64}
}

// begin looks at all minutes again from an instant on.
func (z *minuteSealer) begin(at int64) { z.busy, z.next = false, min(z.next, at) }

// heed takes in what a commit has written. Minutes of spans that were sealed, or are
// about to be, are looked at again.
func (z *minuteSealer) heed(changed []Minute) {
	for i, m := range changed {
		if i == 0 || m.Start > z.newest {
			z.newest = m.Start
		}
		if m.Start < z.next || z.busy && spanOf(m.Start) == z.span {
			z.begin(spanOf(m.Start))
		}
	}
}

// sealMinutes does some of the work that there is, after a commit of minutes. What fails is
// logged once and tried again later.
func (s *Store) sealMinutes(changed []Minute) {
	z := &s.minuteSealing
	z.heed(changed)
	for budget := 1 + sealMinutesShare*len(changed); budget > 0; {
		cost, err := s.minuteStep()
		if err != nil && !z.failed {
			z.failed = true
			s.log.Warn("minutes are not sealed and take more room", "file", s.path, "err", err)
		}
		if cost == 0 || err != nil {
			return
		}
		budget -= cost
	}
}

// minuteStep does one thing and tells what it cost, 0 if there is nothing to do.
func (s *Store) minuteStep() (cost int, err error) {
	z := &s.minuteSealing
	switch {
	case !z.busy:
		err = s.view(func(tx *bolt.Tx) error {
			cost = z.look(tx)
			return nil
		})
		return cost, err
	case len(z.loads) > 0:
		err := s.update(func(tx *bolt.Tx) (err error) {
			cost, err = s.sealSpan(tx, z.loads[0])
			return err
		})
		if err == errNothing {
			err = nil
		}
		if err == nil || z.spared[z.loads[0]] {
			z.loads = z.loads[1:]
		}
		return cost, err
	}
	var last []byte
	err = s.update(func(tx *bolt.Tx) (err error) {
		cost, last, err = z.remove(tx)
		return err
	})
	if err != nil && err != errNothing {
		return cost, err
	}
	if z.removed = last; last == nil {
		z.busy, z.next = false, spanAfter(z.span)
	}
	return cost, nil
}

// look begins with the next span that can be sealed, if there is one.
func (z *minuteSealer) look(tx *bolt.Tx) (cost int) {
	c := tx.Bucket(bucketMinutes).Cursor()
	k, _ := c.Seek(minuteKey(z.next, 0))
	if len(k) != 12 {
		return 0
	}
	span := spanOf(keyTime(k))
	end := spanAfter(span)
	mark, _ := readHourMark(tx)
	if end > mark.built || end > math.MaxInt64-z.after || end+z.after > z.newest {
		return 0
	}
	loads := map[uint32]bool{}
	for ; len(k) == 12 && keyTime(k) < end; k, _ = c.Next() {
		loads[firstLoad(k)] = true
		cost++
	}
	z.busy, z.span, z.spared, z.removed = true, span, map[uint32]bool{}, nil
	z.loads = z.loads[:0]
	for load := range loads {
		z.loads = append(z.loads, load)
	}
	slices.Sort(z.loads)
	return 1 + cost/16 // nothing is read but keys
}

// sealSpan writes the block of load, which is the first of its key, and those that share the
// key. What of their minutes
// is damaged stays under its key, to be told; beside a block that is damaged all do.
func (s *Store) sealSpan(tx *bolt.Tx, load uint32) (cost int, err error) {
	z := &s.minuteSealing
	g := spanKeys{span: z.span}
	g.gather(s, tx, load)
	key, old := minuteBlock(tx, z.span, load)
	if old != nil {
		if err := minuteColumns(key, old, anyLoad, func(place, []byte) error { return nil }); err != nil {
			s.torn = append(s.torn, s.damage("sealed minutes", key, err))
			z.spared[load] = true
			return 1 + len(g.starts), nil
		}
	}
	w := newBlockWriter(key)
	var minutes []Minute
	for i := range uint32(loadsAKey) {
		if minutes, err = g.ofLoad(minutes[:0], key, old, load+i); err != nil || len(minutes) > mostSealed {
			z.spared[load] = true
			return 1 + cost, err
		}
		if len(minutes) > 0 {
			w.add(load+i, uint64(len(minutes)), appendMinuteColumn(nil, minutes, z.span))
		}
		cost += len(minutes)
	}
	if block := w.block(); w.columns > 0 && !bytes.Equal(block, old) {
		return 1 + cost, putMinuteBlock(tx, key, block)
	}
	return 1 + cost, errNothing
}

// spanKeys are those keys of a span that hold the minutes of some loads.
type spanKeys struct {
	span   int64
	starts []int64 // of all
	keys   [][]byte
	values [][]byte // of those that can be read
}

func (g *spanKeys) gather(s *Store, tx *bolt.Tx, load uint32) {
	c := loadCursor{tx.Bucket(bucketMinutes).Cursor(), load / loadsAKey}
	for k, v := c.seek(g.span); k != nil && keyTime(k) < spanAfter(g.span); k, v = c.next() {
		g.starts = append(g.starts, keyTime(k))
		if _, err := parseMinutes(nil, k, v, noLoad); err != nil {
			s.torn = append(s.torn, s.damage("minutes", k, err))
			continue
		}
		g.keys, g.values = append(g.keys, k), append(g.values, v)
	}
}

// ofLoad adds to all the minutes of a load under the keys, and those that the block has
// beside these, by start.
func (g *spanKeys) ofLoad(all []Minute, key, block []byte, load uint32) (_ []Minute, err error) {
	want := func(l uint32) bool { return l == load }
	for i, k := range g.keys {
		if all, err = parseMinutes(all, k, g.values[i], want); err != nil {
			return all, err
		}
	}
	if block == nil {
		return all, nil
	}
	apart := len(all)
	if all, err = parseMinuteBlock(all, key, block, want); err != nil {
		return all, err
	}
	rest := slices.DeleteFunc(all[apart:], func(m Minute) bool {
		_, again := slices.BinarySearch(g.starts, m.Start)
		return again
	})
	all = all[:apart+len(rest)]
	slices.SortStableFunc(all, byStart)
	return all, nil
}

func noLoad(uint32) bool { return false }

// remove removes some keys of the span, all of whose blocks are written. last is the last
// that it has looked at, nil at the end.
func (z *minuteSealer) remove(tx *bolt.Tx) (cost int, last []byte, err error) {
	bucket := tx.Bucket(bucketMinutes)
	from := z.removed
	if from == nil {
		from = minuteKey(z.span, 0)
	}
	var gone [][]byte
	c := bucket.Cursor()
	for k, v := c.Seek(from); len(k) == 12 && keyTime(k) < spanAfter(z.span); k, v = c.Next() {
		if cost++; cost > keysAStepGone {
			last = bytes.Clone(k)
			break
		}
		if _, err := parseMinutes(nil, k, v, noLoad); err == nil && !z.spared[firstLoad(k)] {
			gone = append(gone, bytes.Clone(k))
		}
	}
	if len(gone) == 0 {
		return 1 + cost, last, errNothing
	}
	for _, k := range gone {
		if err := bucket.Delete(k); err != nil {
			return cost, last, fmt.Errorf("remove minutes: %w", err)
		}
	}
	return 1 + cost, last, nil
}
