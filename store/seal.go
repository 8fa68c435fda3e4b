package store

import (
	"bytes"
	"cmp"
	"encoding/binary"
	"errors"
	"math"
	"time"

	bolt "go.etcd.io/bbolt"
)

const (
	// sealReadings is how many readings make a block: what of each tag comes to a
	// hundred and more, but no more than sealMost in all, for they are held in memory.
	sealReadings = 1 << 16
	sealOfATag   = 128
	sealMost     = 1 << 19

	// sealSpan is how much time a block covers before it is closed with fewer.
	sealSpan = 24 * time.Hour

	// sealAtLeast is how many readings' worth of work a commit does to seal others,
	// beside what those that it brings will cost, and 1/sealSpare more to catch up.
	sealAtLeast = 1 << 13
	sealSpare   = 4
	// sealColumn is what beginning a column costs, and sealWrite writing a block, in
	// readings, each of which takes as long to be taken in from the journal as to be
	// put in a column.
	sealColumn = 1 << 5
	sealWrite  = 1 << 14

	defaultBeatAge = time.Hour
)

var errTrimmed = errors.New("groups are gone meanwhile")

// sealer turns closed groups into blocks, a little with each commit. All but a finished
// block is in memory only, and is made again after a restart.
type sealer struct {
	enough    int    // readings that make a block
	next      uint64 // number of the first record that has not been looked at
	notBefore int64  // how far event time must come before there is something to do

	span    span // of the groups taken in
	names   [][]byte
	begun   int64 // Through of the first of them
	columns columns
	tags    []uint32     // those not written yet, once enough is taken in
	writer  *blockWriter // nil: still taking in
	block   []byte       // nil: not finished
	failed  bool         // a failure has been logged

	wide int // how many columns the block has, or the one before if more
	owed int // what the last commit did beyond its share
}

func newSealer(next uint64) sealer {
	return sealer{enough: sealReadings, next: next, notBefore: math.MinInt64, columns: columns{}}
}

// seal does some of the work that there is, after a batch of readings. What fails is
// logged once and tried again later: the readings are in the journal.
func (s *Store) seal(readings int) {
	budget := s.sealing.share(readings) - s.sealing.owed
	s.sealing.owed = 0
	for budget > 0 {
		cost, err := s.sealStep()
		if err != nil && !s.sealing.failed {
			s.sealing.failed = true
			s.log.Warn("readings are not sealed and take more room", "file", s.path, "err", err)
		}
		if cost == 0 || err != nil {
			return
		}
		budget -= cost
	}
	s.sealing.owed = -budget
}

// share is how much a commit of some readings is to do. It follows from what a block
// costs: to take its readings in, to write each and begin the columns, and to put it in
// the file.
func (z *sealer) share(readings int) int {
	tags := max(z.wide, len(z.columns))
	enough := int64(z.wanted(tags))
	block := 2*enough + sealColumn*int64(tags) + sealWrite
	return sealAtLeast + int(int64(readings)*(block+block/sealSpare)/enough)
}

// wanted is how many readings make a block of so many columns.
func (z *sealer) wanted(tags int) int { return min(max(z.enough, sealOfATag*tags), sealMost) }

// sealStep does one thing and tells what it cost, 0 if there is nothing to do.
func (s *Store) sealStep() (cost int, err error) {
	z := &s.sealing
	switch {
	case z.block != nil:
		return sealWrite, s.sealBlock()
	case z.writer != nil:
		return z.writeColumn(), nil
	}
	c, err := s.sealable()
	if err != nil || c.records == nil {
		return 0, err
	}
	if len(z.names) > 0 && c.first != z.span.last+1 {
		z.close()
		return 1, nil
	}
	var beats []Beat
	err = c.each(func(_ uint64, of []Beat) bool {
		beats = append(beats, of...)
		return true
	})
	if err != nil || len(beats) == 0 {
		// It stays as it is, for readers to be told.
		s.passOver("group", c.span.name(), err)
		z.skip(c.last + 1)
		return 1, nil
	}
	through := beats[len(beats)-1].Through
	if age := int64(s.beatAge); through > math.MaxInt64-age || through+age > s.newest {
		z.notBefore = through
		if through <= math.MaxInt64-age {
			z.notBefore += age
		}
		return 0, nil
	}
	z.take(c, beats)
	return 1 + int(c.readings), nil
}

// sealable returns the next group that can go into a block, or none.
func (s *Store) sealable() (c chunk, err error) {
	z := &s.sealing
	if s.newest < z.notBefore {
		return c, nil
	}
	err = s.view(func(tx *bolt.Tx) error {
		mark, err := s.checkpoint(tx)
		if err != nil {
			return err
		}
		journal := groupSide{bucket: tx.Bucket(bucketJournal)}
		cursor := journal.bucket.Cursor()
		for journal.name, _ = cursor.Seek(sequenceKey(z.next)); journal.name != nil; journal.name, _ = cursor.Next() {
			head, err := parseName(journal.name)
			if err != nil {
				s.passOver("name of a group", journal.name, err)
				z.skip(binary.BigEndian.Uint64(journal.name) + 1)
				continue
			}
			if head.last < mark.seq {
				c = chunk{span: head, records: bytes.Clone(journal.bytes())}
			}
			return nil
		}
		return nil
	})
	return c, err
}

// passOver tells of a group that cannot be sealed.
func (s *Store) passOver(what string, name []byte, err error) {
	s.damaged.Add(1)
	s.log.Warn("damaged readings of the history stay as they are", "file", s.path, "err", s.damage(what, name, cmp.Or(err, errRecord)))
}

// skip passes over a group; those before it cannot share a block with those after it.
func (z *sealer) skip(next uint64) {
	z.next = next
	if len(z.names) > 0 {
		z.close()
	}
}

func (z *sealer) take(c chunk, beats []Beat) {
	if len(z.names) == 0 {
		z.span, z.begun = newSpan(c.first), beats[0].Through
	}
	z.names = append(z.names, c.span.name())
	z.next = c.last + 1
	for _, b := range beats {
		z.span.add([]Beat{b})
		for _, r := range b.Readings {
			z.columns.add(r)
		}
	}
	z.span.last = c.last
	if int(z.span.readings) >= z.wanted(len(z.columns)) || beats[len(beats)-1].Through-z.begun >= int64(sealSpan) {
		z.close()
	}
}

// close ends the taking in.
func (z *sealer) close() {
	z.tags, z.writer = z.columns.tags(), newBlockWriter(headKey(z.span.name()))
	z.wide = len(z.tags)
}

func (z *sealer) writeColumn() (cost int) {
	if len(z.tags) == 0 {
		z.block = z.writer.block()
		return 1
	}
	c := z.columns[z.tags[0]]
	z.writer.add(z.tags[0], uint64(len(c.at)), appendColumn(nil, c, z.span.earliest))
	delete(z.columns, z.tags[0])
	z.tags = z.tags[1:]
	return sealColumn + len(c.at)
}

// sealBlock puts the block in the place of its groups.
func (s *Store) sealBlock() error {
	z := &s.sealing
	err := s.update(func(tx *bolt.Tx) error {
		journal := tx.Bucket(bucketJournal)
		for _, name := range z.names {
			if journal.Bucket(name) == nil {
				return errTrimmed
			}
			if err := journal.DeleteBucket(name); err != nil {
				return err
			}
		}
		return putRecords(tx.Bucket(bucketSealed), z.span.name(), z.block)
	})
	if err != nil && err != errTrimmed {
		return err
	}
	enough, wide := z.enough, z.wide
	*z = newSealer(z.next)
	z.enough, z.wide = enough, wide
	return nil
}
