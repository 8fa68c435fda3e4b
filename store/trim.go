package store

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"math"

	bolt "go.etcd.io/bbolt"
)

var errNothing = errors.New("nothing to remove")

const (
	// groupsATrim and minutesATrim bound what one transaction deletes.
	groupsATrim  = 256
	minutesATrim = 10_000

	// trimRoom is what the file may grow beyond its bound so that a deletion in
	// a full file finds the few pages that it writes.
	trimRoom = 4 << 20

	// perKey is what bbolt adds to each key and value in a page.
	perKey = 16

	// reliefShare is the share of what is in use, and reliefBytes the least, that
	// Trim removes after a Commit that found no room.
	reliefShare = 16
	reliefBytes = 256 << 10
)

// Trimmed says what retention has removed. Damaged counts the groups and the keys
// of minutes that could not be read, so that it is not known what was in them.
type Trimmed struct{ Readings, Minutes, Damaged int64 }

// Trim removes readings and minutes older than MaxAge before now (event time,
// Unix nanoseconds), and, while more than MaxBytes are in use, the oldest
// readings and after those the oldest minutes. Beats after the last checkpoint are
// never removed, for a restart needs them, nor is any register. Readings go a
// group at a time, and the group that still grows stays: up to 48 KiB of them
// may be kept longer than MaxAge. After a Commit that found no room, Trim makes
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
	old := int64(math.MinInt64)
	if s.maxAge > 0 {
		old = now - int64(s.maxAge)
	}
	var t Trimmed
	for _, remove := range []remover{s.trimGroups, s.trimMinutes} {
		for more := true; more; {
			done := t
			err := s.update(func(tx *bolt.Tx) (err error) {
				more, err = remove(tx, old, s.used.Load()-bound, &done)
				if err == nil && done == t {
					return errNothing // an empty transaction would write pages as well
				}
				return err
			})
			if err == errNothing {
				break
			}
			if err != nil {
				return t, fmt.Errorf("trim history %q: %w", s.path, err)
			}
			t = done
		}
	}
	s.full = false
	return t, nil
}

// remover removes some of what is older than old, or what is oldest while excess
// bytes are too many. more tells that it is to be called again, after the pages that
// became free have been counted.
type remover func(tx *bolt.Tx, old, excess int64, t *Trimmed) (more bool, err error)

// trimGroups removes groups from the front of the journal.
func (s *Store) trimGroups(tx *bolt.Tx, old, excess int64, t *Trimmed) (more bool, err error) {
	mark, err := s.checkpoint(tx)
	if err != nil {
		return false, err
	}
	journal := tx.Bucket(bucketJournal)
	names := s.doomed(journal, mark.seq, old, excess)
	for _, name := range names {
		if err := journal.DeleteBucket(name); err != nil {
			return false, err
		}
		if head, err := parseName(name); err == nil {
			t.Readings += int64(head.readings)
		} else {
			t.Damaged++
		}
	}
	return len(names) > 0, nil
}

// doomed returns the names of the groups to remove, oldest first. A group with a
// damaged name goes with the next one after it.
func (s *Store) doomed(journal *bolt.Bucket, mark uint64, old, excess int64) (names [][]byte) {
	page := int64(s.db.Info().PageSize)
	var damaged [][]byte
	c := journal.Cursor()
	for k, _ := c.First(); k != nil && len(names) < groupsATrim; k, _ = c.Next() {
		head, err := parseName(k)
		if err != nil {
			damaged = append(damaged, bytes.Clone(k))
			continue
		}
		if head.last >= mark || head.latest >= old && excess <= 0 {
			break
		}
		size := 0
		if own := journal.Bucket(k); own != nil {
			size = len(own.Get(keyRecords))
		}
		excess -= (int64(size) + page) / page * page
		names = append(append(names, damaged...), bytes.Clone(k))
		damaged = nil
	}
	return names
}

// trimMinutes removes minutes from the front.
func (s *Store) trimMinutes(tx *bolt.Tx, old, excess int64, t *Trimmed) (more bool, err error) {
	over := excess > 0
	if over {
		excess += int64(s.db.Info().PageSize) // room comes by whole pages
	}
	minutes := tx.Bucket(bucketMinutes)
	var keys [][]byte
	c := minutes.Cursor()
	for k, v := c.Seek(keyFirstMinute); k != nil && len(keys) < minutesATrim; k, v = c.Next() {
		start := int64(binary.BigEndian.Uint64(k) ^ 1<<63)
		if start >= old && excess <= 0 {
			break
		}
		excess -= int64(len(k) + len(v) + perKey)
		keys = append(keys, bytes.Clone(k))
		if all, err := parseMinutes(nil, k, v, anyLoad); err == nil {
			t.Minutes += int64(len(all))
		} else {
			t.Damaged++
		}
	}
	// Collected first, for a deletion moves what a cursor stands on.
	for _, k := range keys {
		if err := minutes.Delete(k); err != nil {
			return false, err
		}
	}
	return len(keys) > 0 && (over || len(keys) == minutesATrim), nil
}
