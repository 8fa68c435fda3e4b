package store

import (
	"bytes"

	bolt "go.etcd.io/bbolt"
)

// groupCursor goes through closed groups and sealed blocks together, in the order of
// their records.
type groupCursor struct {
	journal, sealed groupSide
}

type groupSide struct {
	bucket *bolt.Bucket
	cursor *bolt.Cursor
	name   []byte
}

func newGroupCursor(tx *bolt.Tx) *groupCursor {
	side := func(name []byte) groupSide {
		b := tx.Bucket(name)
		return groupSide{bucket: b, cursor: b.Cursor()}
	}
	return &groupCursor{side(bucketJournal), side(bucketSealed)}
}

// first stands on the first of all.
func (c *groupCursor) first() {
	for _, s := range []*groupSide{&c.journal, &c.sealed} {
		s.name, _ = s.cursor.First()
	}
}

// last returns the name of the last of all, nil where there is none.
func (c *groupCursor) last() []byte {
	j, _ := c.journal.cursor.Last()
	s, _ := c.sealed.cursor.Last()
	if bytes.Compare(s, j) > 0 {
		return s
	}
	return j
}

// seek stands on what holds record seq, on something before it, or on the first
// after it.
func (c *groupCursor) seek(seq uint64) {
	for _, s := range []*groupSide{&c.journal, &c.sealed} {
		s.name = seekGroup(s.cursor, seq)
	}
}

// at is the side that the cursor stands on; its name is nil at the end.
func (c *groupCursor) at() *groupSide {
	if c.sealed.name != nil && (c.journal.name == nil || bytes.Compare(c.sealed.name, c.journal.name) < 0) {
		return &c.sealed
	}
	return &c.journal
}

func (c *groupCursor) next() {
	s := c.at()
	s.name, _ = s.cursor.Next()
}

// bytes returns what lies under the name, nil where that is not a bucket.
func (s *groupSide) bytes() []byte {
	if own := s.bucket.Bucket(s.name); own != nil {
		return own.Get(keyRecords)
	}
	return nil
}
