package store

import (
	"bytes"
	"iter"
	"math"

	bolt "go.etcd.io/bbolt"
)

const (
	// mostEvents bounds how many events Trim leaves: of an agent that works, some hundred
	// years'.
	mostEvents = 100_000
	// eventsAView bounds how long a read transaction lasts, as hoursAView does.
	eventsAView = 1024
)

// NextEvent returns a number that no event has borne yet. Who writes events counts on from
// there: an event is in the file exactly once, however often its batch was tried, and one that
// has ended finds itself again.
func (s *Store) NextEvent() (next uint64, err error) {
	err = s.view(func(tx *bolt.Tx) error {
		next = tx.Bucket(bucketEvents).Sequence() + 1
		return nil
	})
	return next, err
}

// putEvents writes events; one of the same At and Number is replaced.
func putEvents(tx *bolt.Tx, events []Event) error {
	bucket := tx.Bucket(bucketEvents)
	bucket.FillPercent = appendFill
	last := bucket.Sequence()
	for _, e := range events {
		key := eventKey(e.At, e.Number)
		if err := bucket.Put(key, appendEvent(nil, key, e.kept())); err != nil {
			return err
		}
		last = max(last, e.Number)
	}
	return bucket.SetSequence(last)
}

// createEvents makes the bucket of events.
func createEvents(tx *bolt.Tx) error {
	bucket, err := tx.CreateBucket(bucketEvents)
	if err != nil {
		return err
	}
	_, err = bucket.CreateBucket(keyPlaceholder)
	return err
}

// Events yields the events of which any part lies in from <= t < to, by At. The store may
// be written to meanwhile. It looks at all events before to, of which there are few.
// Damaged events are told as an error and passed over unless the caller stops.
func (s *Store) Events(from, to int64) iter.Seq2[Event, error] {
	return func(yield func(Event, error) bool) {
		for next := keyFirstMinute; next != nil; {
			var found []Event
			var faults []error
			found, faults, next = s.eventsFrom(next, from, to)
			for _, e := range found {
				if !yield(e, nil) {
					return
				}
			}
			for _, err := range faults {
				if !yield(Event{}, err) {
					return
				}
			}
		}
	}
}

// eventsFrom looks at some events from a key on. next is the key to go on at, nil at the end.
func (s *Store) eventsFrom(key []byte, from, to int64) (found []Event, faults []error, next []byte) {
	err := s.view(func(tx *bolt.Tx) error {
		c := tx.Bucket(bucketEvents).Cursor()
		k, v := c.Seek(key)
		for n := 0; k != nil; k, v = c.Next() {
			if n++; n > eventsAView {
				next = bytes.Clone(k)
				return nil
			}
			e, err := parseEvent(k, v)
			switch {
			case err != nil:
				faults = append(faults, s.damage("event", k, err))
			case e.At >= to:
				return nil
			case e.overlaps(from, to):
				found = append(found, e)
			}
		}
		return nil
	})
	if err != nil {
		return found, append(faults, err), nil
	}
	return found, faults, next
}

// trimEvents removes events from the front, also those that are too many.
func (s *Store) trimEvents(tx *bolt.Tx, old, excess int64, t *Trimmed) (more bool, err error) {
	bucket := tx.Bucket(bucketEvents)
	keys, more := s.oldest(bucket, old, excess, math.MaxInt64)
	if over := min(countEvents(bucket)-s.mostEvents, keysATrim); over > len(keys) {
		keys, more = firstKeys(bucket, over), over == keysATrim
	}
	err = removeKeys(bucket, keys, func(k, v []byte) {
		if _, err := parseEvent(k, v); err == nil {
			t.Events++
		} else {
			t.Damaged++
		}
	})
	return more, err
}

func countEvents(bucket *bolt.Bucket) (n int) {
	c := bucket.Cursor()
	for k, _ := c.Seek(keyFirstMinute); k != nil; k, _ = c.Next() {
		n++
	}
	return n
}

// firstKeys returns the first n keys of a bucket.
func firstKeys(bucket *bolt.Bucket, n int) (keys [][]byte) {
	c := bucket.Cursor()
	for k, _ := c.Seek(keyFirstMinute); k != nil && len(keys) < n; k, _ = c.Next() {
		keys = append(keys, bytes.Clone(k))
	}
	return keys
}
