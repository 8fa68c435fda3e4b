package store

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"iter"
	"math"
	"time"

	bolt "go.etcd.io/bbolt"
)

// headersAView and hoursAView bound how long a read transaction lasts: pages
// that it sees cannot be used again before it ends.
const (
	headersAView = 4096
	hoursAView   = 1024
)

func (s *Store) damage(what string, key []byte, err error) error {
	return fmt.Errorf("history %q: %w: %s with key % x: %w", s.path, ErrDamaged, what, key, err)
}

// chunk is a group or a block taken out of the file.
type chunk struct {
	span
	sealed  bool
	records []byte // or the block
}

// chunks yields the groups and blocks that hold records after number after and of which
// want is true, in order; each comes from a read transaction of its own. A group with a
// damaged header is told as an error and passed over.
func (s *Store) chunks(after uint64, want func(span) bool) iter.Seq2[chunk, error] {
	return func(yield func(chunk, error) bool) {
		for {
			var c chunk
			end := true // also when a panic ends the search
			err := s.view(func(tx *bolt.Tx) (err error) {
				c, end, err = s.nextChunk(tx, &after, want)
				return err
			})
			if (c.records != nil || err != nil) && !yield(c, err) {
				return
			}
			if end {
				return
			}
		}
	}
}

// nextChunk looks for the next wanted group and moves after past what it has
// looked at. end tells that nothing comes after it.
func (s *Store) nextChunk(tx *bolt.Tx, after *uint64, want func(span) bool) (c chunk, end bool, err error) {
	cursor := newGroupCursor(tx)
	cursor.seek(*after + 1)
	for range headersAView {
		at := cursor.at()
		if at.name == nil {
			c, err = s.openChunk(tx, *after, want)
			return c, true, err
		}
		head, err := parseName(at.name)
		if err != nil {
			err = s.damage("group", at.name, err)
			cursor.next()
			if at = cursor.at(); at.name == nil {
				return c, true, err
			}
			if after := *after + 1; after > 1 {
				if next, bad := parseName(at.name); bad == nil && next.first <= after {
					continue // what it holds lies before
				}
			}
			*after = binary.BigEndian.Uint64(at.name) - 1
			return c, false, err
		}
		if *after > 0 && head.first > *after+1 {
			missing := fmt.Errorf("records %d to %d are missing before it", *after+1, head.first-1)
			*after = head.first - 1
			if trimmed, err := s.trimmed(tx, head.first); err != nil || !trimmed {
				return c, false, errors.Join(err, s.damage("group", at.name, missing))
			}
		}
		fresh := head.last > *after
		*after = max(*after, head.last)
		if fresh && want(head) {
			records := at.bytes()
			if records == nil {
				return c, false, s.damage("group", at.name, errRecord)
			}
			return chunk{head, at == &cursor.sealed, bytes.Clone(records)}, false, nil
		}
		cursor.next()
	}
	return c, false, nil
}

// trimmed tells whether retention may have removed the record before first.
func (s *Store) trimmed(tx *bolt.Tx, first uint64) (bool, error) {
	mark, err := s.checkpoint(tx)
	if err != nil {
		return false, err
	}
	cursor := newGroupCursor(tx)
	cursor.first()
	k := cursor.at().name
	return len(k) >= 8 && binary.BigEndian.Uint64(k) == first && first-1 < mark.seq, nil
}

// seekGroup finds the group with record seq, or the first one after it.
func seekGroup(c *bolt.Cursor, seq uint64) []byte {
	k, _ := c.Seek(sequenceKey(seq))
	if k != nil && binary.BigEndian.Uint64(k) == seq {
		return k
	}
	if k, _ = c.Prev(); k == nil {
		k, _ = c.First()
	}
	return k
}

// openChunk returns the open group.
func (s *Store) openChunk(tx *bolt.Tx, after uint64, want func(span) bool) (chunk, error) {
	g, err := loadOpen(tx)
	if err != nil {
		return chunk{}, s.damage("open group", nil, err)
	}
	if g.last < g.first || g.last <= after || !want(g.span) {
		return chunk{}, nil
	}
	return chunk{g.span, false, append(recentRecords(tx), g.tail...)}, nil
}

// each calls f with the records of c in order until f returns false.
func (c *chunk) each(f func(seq uint64, beats []Beat) bool) error {
	p, m := parser{rest: c.records}, newMemory()
	for seq := c.first; seq <= c.last; seq++ {
		beats, err := p.record(seq, m)
		if err != nil {
			return fmt.Errorf("%w: record %d: %w", ErrDamaged, seq, err)
		}
		if !f(seq, beats) {
			return nil
		}
	}
	return nil
}

// beats yields the beats of all records numbered in (after, upTo]. None of these
// should be sealed.
func (s *Store) beats(after, upTo uint64, want func(span) bool) iter.Seq2[Beat, error] {
	return func(yield func(Beat, error) bool) {
		for c, err := range s.chunks(after, want) {
			if err != nil {
				if !yield(Beat{}, err) {
					return
				}
				continue
			}
			if c.first > upTo {
				return
			}
			if c.sealed {
				err := fmt.Errorf("%w: records %d to %d are sealed, their beats are gone", ErrDamaged, c.first, c.last)
				if !yield(Beat{}, fmt.Errorf("history %q: %w", s.path, err)) {
					return
				}
				continue
			}
			stopped := false
			err := c.each(func(seq uint64, beats []Beat) bool {
				if seq <= after {
					return true
				}
				for i := 0; i < len(beats) && seq <= upTo && !stopped; i++ {
					stopped = !yield(beats[i], nil)
				}
				return seq < upTo && !stopped
			})
			if stopped || err != nil && !yield(Beat{}, fmt.Errorf("history %q: %w", s.path, err)) {
				return
			}
		}
	}
}

func every(span) bool { return true }

// Since yields the beats of the batches that were committed after the last
// checkpoint, in the order of commitment; without a checkpoint, all there are.
// Put through the engine that was restored from [Store.Checkpoint], they bring it
// to where it was.
func (s *Store) Since() iter.Seq2[Beat, error] {
	return func(yield func(Beat, error) bool) {
		c, err := s.latest()
		if err != nil {
			yield(Beat{}, err)
			return
		}
		s.beats(c.seq, math.MaxUint64, every)(yield)
	}
}

// Before yields, in the order of commitment, the beats that the last checkpoint
// stands for and whose Through is not more than d before that of the newest of
// them, as far as Options.BeatAge keeps them. With them the caller knows again what
// the broker delivers a second time.
func (s *Store) Before(d time.Duration) iter.Seq2[Beat, error] {
	return func(yield func(Beat, error) bool) {
		c, err := s.latest()
		if err != nil {
			yield(Beat{}, err)
			return
		}
		if c.seq == 0 {
			return
		}
		var newest int64
		for b, err := range s.beats(c.seq-1, c.seq, every) {
			if err != nil {
				yield(Beat{}, err)
				return
			}
			newest = b.Through
		}
		from := newest - int64(d)
		start, err := s.groupBefore(c.seq, from)
		if err != nil {
			yield(Beat{}, err)
			return
		}
		for b, err := range s.beats(start, c.seq, every) {
			if (err != nil || b.Through >= from) && !yield(b, err) {
				return
			}
		}
	}
}

// groupBefore goes back from the group of record seq until one holds nothing at
// from or later, and returns the number of its last record, or else that of the last
// record before the journal. It goes back no further than to the newest block, whose
// beats are gone: groups that could not be sealed may lie before that.
func (s *Store) groupBefore(seq uint64, from int64) (last uint64, err error) {
	err = s.view(func(tx *bolt.Tx) error {
		sealed := lastSealed(tx)
		c := tx.Bucket(bucketJournal).Cursor()
		for k := seekGroup(c, seq); k != nil; k, _ = c.Prev() {
			head, err := parseName(k)
			if err != nil {
				return s.damage("group", k, err)
			}
			if head.latest < from || head.last <= sealed {
				last = head.last
				break
			}
			last = head.first - 1
		}
		last = max(last, sealed)
		return nil
	})
	return last, err
}

// lastSealed returns the number of the last record of the newest block whose name can be
// read, 0 where there is none.
func lastSealed(tx *bolt.Tx) uint64 {
	c := tx.Bucket(bucketSealed).Cursor()
	for k, _ := c.Last(); k != nil; k, _ = c.Prev() {
		if newest, err := parseName(k); err == nil {
			return newest.last
		}
	}
	return 0
}

// Readings yields the readings of a tag with from <= At < to, in the order in
// which they were committed. That is the order of At but for late ones. A reading that
// was committed twice comes twice. The store may be written to meanwhile.
// After an error the next group is tried, unless the caller stops.
func (s *Store) Readings(tag uint32, from, to int64) iter.Seq2[Reading, error] {
	want := func(g span) bool { return g.overlaps(from, to) }
	return func(yield func(Reading, error) bool) {
		var passed []passedGroup
		for c, err := range s.chunks(0, want) {
			skip, found, stopped := 0, 0, false
			if err == nil {
				skip = c.skip(passed)
				err = c.ofTag(tag, func(r Reading) bool {
					if r.At < from || r.At >= to {
						return true
					}
					if found++; found > skip {
						stopped = !yield(r, nil)
					}
					return !stopped
				})
				passed = append(passed, passedGroup{c.first, found})
				if err != nil {
					err = fmt.Errorf("history %q: %w", s.path, err)
				}
			}
			if stopped || err != nil && !yield(Reading{}, err) {
				return
			}
		}
	}
}

// passedGroup tells how many readings a reader got from a group.
type passedGroup struct {
	first uint64
	found int
}

// skip is how many readings of c a reader already had from its groups, before they
// were sealed.
func (c *chunk) skip(passed []passedGroup) (n int) {
	for i := len(passed) - 1; i >= 0 && passed[i].first >= c.first; i-- {
		n += passed[i].found
	}
	return n
}

// ofTag calls f with the readings of a tag until f returns false.
func (c *chunk) ofTag(tag uint32, f func(Reading) bool) error {
	if c.sealed {
		if err := eachReading(c.span.name(), c.records, tag, f); err != nil {
			return fmt.Errorf("%w: tag %d in the block of records %d to %d: %w", ErrDamaged, tag, c.first, c.last, err)
		}
		return nil
	}
	return c.each(func(_ uint64, beats []Beat) bool {
		for _, b := range beats {
			for _, r := range b.Readings {
				if r.Tag == tag && !f(r) {
					return false
				}
			}
		}
		return true
	})
}

// Minutes yields the minutes of a load with from <= Start < to, by Start. The
// store may be written to meanwhile. Damaged minutes are told as an error, after
// those that lie near them, and passed over unless the caller stops.
func (s *Store) Minutes(load uint32, from, to int64) iter.Seq2[Minute, error] {
	return func(yield func(Minute, error) bool) {
		var found []Minute
		for from < to {
			var faults []error
			found, faults, from = s.minutesFrom(found[:0], from, to, load)
			for _, m := range found {
				if !yield(m, nil) {
					return
				}
			}
			for _, err := range faults {
				if !yield(Minute{}, err) {
					return
				}
			}
		}
	}
}

// minutesFrom adds some minutes to found, of no more than a span. next is where to go on, to
// or later at the end.
func (s *Store) minutesFrom(found []Minute, from, to int64, load uint32) (all []Minute, faults []error, next int64) {
	all, next = found, to
	err := s.view(func(tx *bolt.Tx) error {
		at, ok := nextMinute(tx, from, load)
		if !ok || at >= to {
			return nil
		}
		next = min(to, spanAfter(spanOf(at)))
		want, read := s.ofLoad(load)
		all, faults = s.spanMinutes(tx, all, load, at, next-1, want, read)
		return nil
	})
	if err != nil {
		return all, append(faults, err), to
	}
	return all, faults, next
}
