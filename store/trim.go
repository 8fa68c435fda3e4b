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
	page := int64(s.db.Info().PageSize)
	excess := s.excess()
	c := tx.Bucket(bucketJournal).Cursor()
	k, v := c.First()
	for range groupsATrim {
		if k == nil {
			return false, nil
		}
		head, err := parseHeader(k, v)
		if err != nil {
			return false, s.damage("group", k, err)
		}
		if head.last >= mark || head.latest >= old && excess <= 0 {
			return false, nil
		}
		excess -= (int64(len(k)+len(v)+perKey) + page - 1) / page * page
		t.Readings += int64(head.readings)
		if err := c.Delete(); err != nil {
			return false, err
		}
		k, v = c.Next()
	}
	return true, nil
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
