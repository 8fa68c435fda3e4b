package store

import (
	"math"
	"slices"
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"
)

// spoil changes a bit in a value.
func spoil(t *testing.T, s *Store, bucket, key []byte) {
	t.Helper()
	err := s.db.Update(func(tx *bolt.Tx) error {
		v := slices.Clone(tx.Bucket(bucket).Get(key))
		v[len(v)/2] ^= 4
		return tx.Bucket(bucket).Put(key, v)
	})
	if err != nil {
		t.Fatal(err)
	}
}

// twoHours commits 61 minutes of loads 3, 4 and 12.
func twoHours(t *testing.T, s *Store, start int64) {
	t.Helper()
	for minute := range int64(61) {
		at := start + minute*60*second
		commit(t, s, Batch{Minutes: []Minute{wave(3, at), wave(4, at), wave(12, at)}})
	}
}

// TestCommitOverDamagedMinutes brings a minute whose key is damaged: the commit goes on,
// the damage is counted once, and the hour of the load beside it stays as it was built.
func TestCommitOverDamagedMinutes(t *testing.T) {
	s := newStore(t, Options{})
	const start = 480_000 * hourNanos
	twoHours(t, s, start)
	spoil(t, s, bucketMinutes, minuteKey(start, 3))
	for range 2 {
		commit(t, s, Batch{Minutes: []Minute{wave(3, start)}})
	}
	commit(t, s, Batch{Minutes: []Minute{wave(4, start+60*second)}})
	if s.Damaged() != 1 {
		t.Errorf("%d records are damaged, want 1", s.Damaged())
	}
	for _, load := range []uint32{3, 4, 12} {
		if found, told := hourOfLoad(s, load, start); len(told) != 0 || len(found) != 1 || found[0].Minutes != 60 || found[0].Given != 183_000 {
			t.Errorf("the hour of load %d is %+v, with %v", load, found, told)
		}
	}
	if got := drain(t, s.Minutes(3, start, start+60*second)); len(got) != 1 || got[0] != wave(3, start) {
		t.Errorf("the minute is %+v", got)
	}
}

// TestCommitOverDamagedHours brings a minute of an hour whose key is damaged: all hours
// under the key are built anew from their minutes.
func TestCommitOverDamagedHours(t *testing.T) {
	s := newStore(t, Options{})
	const start = 480_000 * hourNanos
	twoHours(t, s, start)
	spoil(t, s, bucketHours, minuteKey(start, 3))
	if _, told := hourOfLoad(s, 4, start); len(told) != 1 {
		t.Errorf("a reader is told %v", told)
	}
	commit(t, s, Batch{Minutes: []Minute{wave(3, start)}})
	for _, load := range []uint32{3, 4, 12} {
		if found, told := hourOfLoad(s, load, start); len(told) != 0 || len(found) != 1 || found[0].Minutes != 60 {
			t.Errorf("the hour of load %d is %+v, with %v", load, found, told)
		}
	}
	if s.Damaged() != 1 {
		t.Errorf("%d records are damaged, want 1", s.Damaged())
	}
}

// TestDamagedMark damages the mark that says which hours are built, with the first minutes
// gone: no hour is lost by that, and none that lost minutes is built anew.
func TestDamagedMark(t *testing.T) {
	s := newStore(t, Options{MaxAge: time.Hour})
	const start = 480_000 * hourNanos
	twoHours(t, s, start)
	twoHours(t, s, start+hourNanos)
	twoHours(t, s, start+2*hourNanos)
	if got, err := s.Trim(start + 2*hourNanos + 30*60*second); err != nil || got.Minutes == 0 {
		t.Fatalf("trimmed %+v, %v", got, err)
	}
	before := drain(t, s.Hours(3, start, start+3*hourNanos))
	spoil(t, s, bucketMeta, keyHours)
	commit(t, s, Batch{Minutes: []Minute{wave(3, start+2*hourNanos)}})
	commit(t, s, Batch{Minutes: []Minute{wave(3, start+hourNanos)}})
	if after := drain(t, s.Hours(3, start, start+3*hourNanos)); len(before) != 3 || !slices.Equal(after, before) {
		t.Errorf("the hours were %+v\nand are %+v", before, after)
	}
	if s.Damaged() != 1 {
		t.Errorf("%d records are damaged, want 1", s.Damaged())
	}
}

// TestBeforeADamagedBlock damages the name of the newest block: what Before asks for lies
// after it, and comes.
func TestBeforeADamagedBlock(t *testing.T) {
	path, _, _ := sample(t)
	var newest span
	editFile(t, path, func(tx *bolt.Tx) (err error) {
		b := tx.Bucket(bucketSealed)
		k, _ := b.Cursor().Last()
		if newest, err = parseName(k); err != nil {
			return err
		}
		name, block := slices.Clone(k), slices.Clone(b.Bucket(k).Get(keyRecords))
		if err := b.DeleteBucket(name); err != nil {
			return err
		}
		name[20] ^= 1
		return putRecords(b, name, block)
	})
	s := openStore(t, path, Options{})
	n := 0
	for b, err := range s.Before(math.MaxInt64 / 2) {
		if err != nil {
			t.Fatal(err)
		}
		if b.Readings[0].Value != float64(int(newest.last)+1+n) {
			t.Fatalf("beat %d after record %d reads %v", n, newest.last, b.Readings[0].Value)
		}
		n++
	}
	if want := damageNumbers - damageNumbers%7 - int(newest.last); n != want {
		t.Errorf("%d beats, want %d", n, want)
	}
	told := 0
	for _, err := range s.Readings(1, 0, math.MaxInt64) {
		if err != nil {
			told++
		}
	}
	if told != 1 {
		t.Errorf("a reader is told %d times", told)
	}
}
