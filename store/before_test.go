package store

import (
	"errors"
	"path/filepath"
	"reflect"
	"slices"
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"
)

// testRecall asks for a span of beats that the store must still keep as such, of those
// in all, which the last checkpoint stands for.
func testRecall(t *testing.T, s *Store, all []Beat, d time.Duration) {
	t.Helper()
	from := all[len(all)-1].Through - int64(d)
	first := slices.IndexFunc(all, func(b Beat) bool { return b.Through >= from })
	got := make([]Beat, 0, len(all)-first)
	for b, err := range s.Before(d) {
		if err != nil {
			t.Fatalf("with %d beats committed, Before(%v) gives %v", len(all), d, err)
		}
		got = append(got, b)
	}
	if !reflect.DeepEqual(got, all[first:]) {
		t.Fatalf("with %d beats committed, Before(%v) gives %d of them, want %d", len(all), d, len(got), len(all)-first)
	}
}

// TestBeforeOfSlowTags commits 60 hours of three tags every 10 s and reopens the file each
// hour. A group covers three hours of these and a block a day, so that once a day every
// closed group is in a block for longer than an hour, and the newest beats are in the
// open group alone.
func TestBeforeOfSlowTags(t *testing.T) {
	t.Parallel()
	path := filepath.Join(t.TempDir(), "history.db")
	var all []Beat
	at, alone := int64(1_760_000_000*second), 0
	for range 60 {
		s, err := Open(path, Options{})
		if err != nil {
			t.Fatal(err)
		}
		s.db.NoSync = true // nothing cuts the power
		for n := range 360 {
			b := Batch{Beats: plant(at, 10, 3)}
			at += 10 * second
			all = append(all, b.Beats...)
			if n%60 == 59 {
				b.Checkpoint = []byte("state")
			}
			commit(t, s, b)
		}
		if blocks, groups := sealedGroups(t, s); blocks > 0 && groups == 0 {
			alone++
		}
		if err := s.Close(); err != nil {
			t.Fatal(err)
		}
		if s, err = Open(path, Options{}); err != nil {
			t.Fatal(err)
		}
		for _, d := range []time.Duration{0, 10 * time.Minute, time.Hour} {
			testRecall(t, s, all, d)
		}
		if err := s.Close(); err != nil {
			t.Fatal(err)
		}
	}
	if alone < 3 {
		t.Errorf("in %d of 60 hours there were blocks and no groups; this test wants 3", alone)
	}
	boltCheck(t, path)
}

// TestBeforeAnUnreadableGroup leaves one old group that cannot be sealed in the journal,
// and blocks before and after it: the beats after the newest block come all the same.
func TestBeforeAnUnreadableGroup(t *testing.T) {
	path, _, _ := sample(t)
	editFile(t, path, func(tx *bolt.Tx) error {
		journal := tx.Bucket(bucketJournal)
		k, _ := journal.Cursor().First()
		records := slices.Clone(journal.Bucket(k).Get(keyRecords))
		records[len(records)/2] ^= 1
		return journal.Bucket(k).Put(keyRecords, records)
	})
	s := openStore(t, path, Options{})
	s.groupBytes, s.sealing.enough, s.beatAge = 6000, 1, 10*second
	for n := uint64(damageNumbers + 1); n <= damageNumbers+400; n++ {
		commit(t, s, numbered(n))
		for b, err := range s.Before(10 * time.Second) {
			if err != nil {
				t.Fatalf("after batch %d: %v, %v", n, b.Through, err)
			}
		}
	}
	var told []error
	for _, err := range s.Readings(1, 0, 1<<62) {
		if err != nil {
			told = append(told, err)
		}
	}
	if len(told) != 1 || !errors.Is(told[0], ErrDamaged) {
		t.Errorf("the group is told as %v", told)
	}
}
