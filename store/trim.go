package store

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"slices"
	"time"

	bolt "go.etcd.io/bbolt"
)

var errNothing = errors.New("nothing to remove")

const (
	// groupsATrim and keysATrim bound what one transaction deletes.
	groupsATrim = 256
	keysATrim   = 10_000

	// trimRoom is what the file may grow beyond its bound so that a deletion in
	// a full file finds the few pages that it writes.
	trimRoom = 4 << 20

	// perKey is what bbolt adds to each key and value in a page.
	perKey = 16

	// reliefShare is the share of what is in use, and reliefBytes the least, that
	// Trim removes after a Commit, or IDs, that found no room.
	reliefShare = 16
	reliefBytes = 256 << 10
)

// Trimmed says what retention has removed. Damaged counts the groups, the blocks and the keys
// of minutes, hours, events and site files that could not be read, so that it is not known what was in
// them.
type Trimmed struct{ Readings, Minutes, Hours, Events, Sites, Damaged int64 }

// Trim removes readings and minutes older than MaxAge and hours and events older than
// MaxHourAge before now (event time, Unix nanoseconds), and, while more than MaxBytes
// are in use, the oldest readings, after those the oldest minutes, then the oldest events,
// then the oldest hours, and last the site files that are no longer in force, which go by age as
// hours do. Of more than 100,000 events the oldest go. An event that lasts is
// as old as its beginning. Beats after the last checkpoint are never removed, for a restart
// needs them, nor the minutes of the newest hour, nor any register. Readings go a
// group or block at a time and the last of these stays: 48 KiB of them, or a
// day's, may be kept longer than MaxAge; and so may six hours of minutes, whose blocks go
// as a whole. After a Commit, or IDs, that found no room, Trim makes
// some, however much MaxBytes allows.
func (s *Store) Trim(now int64) (Trimmed, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	limit := s.db.MaxSize
	s.db.MaxSize += trimRoom
	defer func() { s.db.MaxSize = limit }()

	bound := s.maxBytes
	if s.full {
		used := s.used.Load()
		bound = min(bound, used-max(used/reliefShare, reliefBytes))
	}
	var t Trimmed
	for _, of := range []struct {
		remove remover
		age    time.Duration
	}{{s.trimGroups, s.maxAge}, {s.trimMinutes, s.maxAge}, {s.trimEvents, s.maxHourAge}, {s.trimHours, s.maxHourAge}, {s.trimSites, s.maxHourAge}} {
		old := int64(math.MinInt64)
		if of.age > 0 {
			old = now - int64(of.age)
		}
		if err := s.trim(of.remove, old, bound, &t); err != nil {
			return t, fmt.Errorf("trim history %q: %w", s.path, err)
		}
	}
	s.full = false
	return t, nil
}

// trim calls remove as long as there is more to remove. t counts only what is
// gone from the disk.
func (s *Store) trim(remove remover, old, bound int64, t *Trimmed) error {
	for more := true; more; {
		done := *t
		err := s.update(func(tx *bolt.Tx) (err error) {
			more, err = remove(tx, old, s.used.Load()-bound, &done)
			if err == nil && done == *t {
				return errNothing // an empty transaction would write pages as well
			}
			return err
		})
		if err == errNothing {
			return nil
		}
		if err != nil {
			return err
		}
		s.damaged.Add(done.Damaged - t.Damaged)
		*t = done
	}
	return nil
}

// remover removes some of what is older than old, or what is oldest while excess
// bytes are too many. more tells that it is to be called again, after the pages that
// became free have been counted.
type remover func(tx *bolt.Tx, old, excess int64, t *Trimmed) (more bool, err error)

// trimGroups removes blocks and groups from the front.
func (s *Store) trimGroups(tx *bolt.Tx, old, excess int64, t *Trimmed) (more bool, err error) {
	mark, err := s.checkpoint(tx)
	if err != nil {
		return false, err
	}
	doomed := s.doomed(tx, mark.seq, old, excess)
	for _, d := range doomed {
		if err := d.bucket.DeleteBucket(d.name); err != nil {
			return false, err
		}
		if head, err := parseName(d.name); err == nil {
			t.Readings += int64(head.readings)
		} else {
			t.Damaged++
		}
	}
	return len(doomed) > 0, nil
}

// doomed returns the blocks and groups to remove, oldest first. One with a damaged name
// goes with the next one after it. The last of all stays: its name tells the number of
// the record that comes next.
func (s *Store) doomed(tx *bolt.Tx, mark uint64, old, excess int64) (all []groupSide) {
	page := int64(s.db.Info().PageSize)
	var damaged []groupSide
	c := newGroupCursor(tx)
	last := c.last()
	for c.first(); c.at().name != nil && len(all) < groupsATrim; c.next() {
		if bytes.Equal(c.at().name, last) {
			break
		}
		d := groupSide{bucket: c.at().bucket, name: bytes.Clone(c.at().name)}
		head, err := parseName(d.name)
		if err != nil {
			damaged = append(damaged, d)
			continue
		}
		if head.last >= mark || head.latest >= old && excess <= 0 {
			break
		}
		excess -= (int64(len(d.bytes())) + page) / page * page
		all = append(append(all, damaged...), d)
		damaged = nil
	}
	return all
}

// trimMinutes removes minutes from the front, of hours that have been built. Sealed ones come
// first: a block must go before the keys that stand before it.
func (s *Store) trimMinutes(tx *bolt.Tx, old, excess int64, t *Trimmed) (more bool, err error) {
	keys, _ := s.oldest(tx.Bucket(bucketMinutes), old, excess, math.MaxInt64)
	if len(keys) == 0 && len(s.oldBlocks(tx, old, excess, math.MaxInt64)) == 0 {
		return false, nil
	}
	mark, err := s.hourMark(tx)
	if err != nil {
		return false, err
	}
	if err := s.advanceHours(tx, mark, keysATrim); err != nil {
		return false, err
	}
	mark, _ = readHourMark(tx)
	if blocks := s.oldBlocks(tx, old, excess, mark.built); len(blocks) > 0 {
		mark.trimmed = max(mark.trimmed, spanAfter(keyTime(blocks[len(blocks)-1])))
		if err := s.removeBlocks(minuteBlocks(tx), blocks, t); err != nil {
			return false, err
		}
		return true, putHourMark(tx, mark)
	}
	keys, more = s.oldest(tx.Bucket(bucketMinutes), old, excess, mark.built)
	keys = slices.DeleteFunc(keys, func(k []byte) bool {
		_, block := minuteBlock(tx, keyTime(k), firstLoad(k))
		return block != nil
	})
	if len(keys) == 0 {
		return false, nil
	}
	err = removeKeys(tx.Bucket(bucketMinutes), keys, func(k, v []byte) {
		if all, err := parseMinutes(nil, k, v, anyLoad); err == nil {
			t.Minutes += int64(len(all))
		} else {
			t.Damaged++
		}
	})
	if err != nil {
		return false, err
	}
	mark.trimmed = max(mark.trimmed, hourAfter(hourOf(keyTime(keys[len(keys)-1]))))
	return more, putHourMark(tx, mark)
}

// oldBlocks returns the blocks of minutes at the front of which all is before old, or that
// make up the excess, and in any case before end.
func (s *Store) oldBlocks(tx *bolt.Tx, old, excess, end int64) (keys [][]byte) {
	page := int64(s.db.Info().PageSize)
	blocks := minuteBlocks(tx)
	c := blocks.Cursor()
	for k, _ := c.First(); len(k) == 12 && len(keys) < groupsATrim; k, _ = c.Next() {
		if after := spanAfter(keyTime(k)); after > end || after > old && excess <= 0 {
			break
		}
		excess -= (int64(len(blocks.Bucket(k).Get(keyRecords))) + page) / page * page
		keys = append(keys, bytes.Clone(k))
	}
	return keys
}

func (s *Store) removeBlocks(blocks *bolt.Bucket, keys [][]byte, t *Trimmed) error {
	for _, k := range keys {
		all, _, err := minutePlaces(k, blocks.Bucket(k).Get(keyRecords))
		if err != nil {
			t.Damaged++
		}
		for _, at := range all {
			t.Minutes += int64(at.count)
		}
		if err := blocks.DeleteBucket(k); err != nil {
			return err
		}
		if s.minuteSealing.span == keyTime(k) {
			s.minuteSealing.busy = false // its keys must not follow
		}
	}
	return nil
}

// trimHours removes hours from the front.
func (s *Store) trimHours(tx *bolt.Tx, old, excess int64, t *Trimmed) (more bool, err error) {
	keys, more := s.oldest(tx.Bucket(bucketHours), old, excess, math.MaxInt64)
	err = removeKeys(tx.Bucket(bucketHours), keys, func(k, v []byte) {
		if all, err := parseHours(nil, k, v, anyLoad); err == nil {
			t.Hours += int64(len(all))
		} else {
			t.Damaged++
		}
	})
	return more, err
}

// oldest returns the keys at the front that begin before old, or make up the excess,
// and in any case before end.
func (s *Store) oldest(bucket *bolt.Bucket, old, excess, end int64) (keys [][]byte, more bool) {
	over := excess > 0
	if over {
		excess += int64(s.db.Info().PageSize) // room comes by whole pages
	}
	c := bucket.Cursor()
	for k, v := c.Seek(keyFirstMinute); k != nil && len(keys) < keysATrim; k, v = c.Next() {
		if start := keyTime(k); start >= end || start >= old && excess <= 0 {
			break
		}
		excess -= int64(len(k) + len(v) + perKey)
		keys = append(keys, bytes.Clone(k))
	}
	return keys, len(keys) > 0 && (over || len(keys) == keysATrim)
}

// removeKeys removes keys, each after gone has seen it. They are not removed while
// they are looked for, because a deletion moves what a cursor stands on.
func removeKeys(bucket *bolt.Bucket, keys [][]byte, gone func(k, v []byte)) error {
	for _, k := range keys {
		gone(k, bucket.Get(k))
		if err := bucket.Delete(k); err != nil {
			return err
		}
	}
	return nil
}
