package store

import (
	"encoding/binary"
	"fmt"
	"math"

	bolt "go.etcd.io/bbolt"
)

const (
	// groupsATrim and minutesATrim bound what one transaction deletes.
	groupsATrim  = 256
	minutesATrim = 10_000

	// trimRoom is what the file may grow beyond its bound so that a deletion in
	// a full file finds the few pages that it writes.
	trimRoom = 4 << 20

	// perKey is what bbolt adds to each key and value in a page.
	perKey = 16
)

// Trimmed says what retention has removed.
type Trimmed struct{ Readings, Minutes int64 }

// Trim removes readings and minutes older than MaxAge before now (event time,
// Unix nanoseconds), and, while more than MaxBytes are in use, the oldest
// readings and after those the oldest minutes. Beats after the last checkpoint are
// never removed, for a restart needs them, nor is any register. Readings go a
// group at a time, and the group that still grows stays: up to 48 KiB of them
// may be kept longer than MaxAge.
func (s *Store) Trim(now int64) (Trimmed, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	limit := s.db.MaxSize
	s.db.MaxSize += trimRoom
	defer func() { s.db.MaxSize = limit }()

	old := int64(math.MinInt64)
	if s.maxAge > 0 {
		old = now - int64(s.maxAge)
	}
	var t Trimmed
	for _, remove := range []func(*bolt.Tx, int64, *Trimmed) (bool, error){s.trimGroups, s.trimMinutes} {
		for more := true; more; {
			done := t
			err := s.update(func(tx *bolt.Tx) (err error) {
				more, err = remove(tx, old, &done)
				return err
			})
			if err != nil {
				return t, fmt.Errorf("trim history %q: %w", s.path, err)
			}
			t = done
		}
	}
	return t, nil
}

// excess is how many bytes are in use beyond the bound.
func (s *Store) excess() int64 { return s.used.Load() - s.maxBytes }

// trimGroups removes some groups from the front of the journal. more tells that
// there may be others to remove.
func (s *Store) trimGroups(tx *bolt.Tx, old int64, t *Trimmed) (more bool, err error) {
	mark, _, _, err := readCheckpoint(tx)
	if err != nil {
		return false, s.damage("engine state", keyCheckpoint, err)
	}
	journal := tx.Bucket(bucketJournal)
	names, err := s.doomed(journal, mark, old)
	if err != nil {
		return false, err
	}
	for _, name := range names {
		if err := journal.DeleteBucket(name); err != nil {
			return false, err
		}
		head, err := parseName(name)
		if err != nil {
			return false, err
		}
		t.Readings += int64(head.readings)
	}
	return len(names) == groupsATrim, nil
}

// doomed returns the names of the groups to remove, oldest first.
func (s *Store) doomed(journal *bolt.Bucket, mark uint64, old int64) (names [][]byte, err error) {
	page := int64(s.db.Info().PageSize)
	excess := s.excess()
	c := journal.Cursor()
	for k, _ := c.First(); k != nil && len(names) < groupsATrim; k, _ = c.Next() {
		head, err := parseName(k)
		if err != nil {
			return nil, s.damage("group", k, err)
		}
		if head.last >= mark || head.latest >= old && excess <= 0 {
			break
		}
		size := 0
		if own := journal.Bucket(k); own != nil {
			size = len(own.Get(keyRecords))
		}
		excess -= (int64(size) + page) / page * page
		names = append(names, append([]byte{}, k...))
	}
	return names, nil
}

// trimMinutes does with the minutes as trimGroups does with the journal.
func (s *Store) trimMinutes(tx *bolt.Tx, old int64, t *Trimmed) (more bool, err error) {
	excess := s.excess()
	over := excess > 0
	c := tx.Bucket(bucketMinutes).Cursor()
	k, v := c.Seek(keyFirstMinute)
	for range minutesATrim {
		if k == nil {
			return false, nil
		}
		start := int64(binary.BigEndian.Uint64(k) ^ 1<<63)
		if start >= old && excess <= 0 {
			return over, nil
		}
		excess -= int64(len(k) + len(v) + perKey)
		t.Minutes++
		if err := c.Delete(); err != nil {
			return false, err
		}
		k, v = c.Next()
	}
	return true, nil
}
