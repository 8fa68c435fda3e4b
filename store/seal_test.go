package store

import (
	"encoding/binary"
	"math"
	"path/filepath"
	"slices"
	"testing"

	bolt "go.etcd.io/bbolt"
)

// sealedGroups counts the blocks, and the groups that are not in one.
func sealedGroups(t testing.TB, s *Store) (blocks, groups int) {
	t.Helper()
	err := s.view(func(tx *bolt.Tx) error {
		c := newGroupCursor(tx)
		for c.first(); c.at().name != nil; c.next() {
			if c.at() == &c.sealed {
				blocks++
			} else {
				groups++
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return blocks, groups
}

// TestSeal commits two days with reopenings between: old groups become blocks, and
// readings come as they were committed, whichever they lie in.
func TestSeal(t *testing.T) {
	t.Parallel()
	path := filepath.Join(t.TempDir(), "history.db")
	want := map[uint32][]Reading{}
	w := newWalk(50)
	for range 6 {
		s := openStore(t, path, Options{})
		for range 8 * 60 {
			beats := w.beats(60)
			for _, b := range beats {
				for _, r := range b.Readings {
					want[r.Tag] = append(want[r.Tag], r)
				}
			}
			commit(t, s, Batch{Beats: beats, Checkpoint: []byte("state")})
		}
		if err := s.Close(); err != nil {
			t.Fatal(err)
		}
	}
	s := openStore(t, path, Options{})
	blocks, groups := sealedGroups(t, s)
	if blocks < 6 || groups > 10 {
		t.Errorf("%d blocks and %d groups", blocks, groups)
	}
	for tag, all := range want {
		if got := drain(t, s.Readings(tag, math.MinInt64, math.MaxInt64)); !slices.Equal(got, all) {
			t.Fatalf("tag %d: %d readings, want %d as committed", tag, len(got), len(all))
		}
	}
	from, to := want[3][5000].At, want[3][7000].At
	if got := drain(t, s.Readings(3, from, to)); !slices.Equal(got, want[3][5000:7000]) {
		t.Errorf("%d readings of a part, want 2000", len(got))
	}
}

// TestSealWhileReading seals groups behind the back of a reader who is at them: it
// gets each reading once.
func TestSealWhileReading(t *testing.T) {
	s := newStore(t, Options{})
	s.groupBytes, s.beatAge = 2000, math.MaxInt64
	n := uint64(0)
	for ; n < 600; n++ {
		commit(t, s, numbered(n+1))
	}
	next := 1.0
	for r, err := range s.Readings(1, 0, 600*second) {
		if err != nil || r.Value != next {
			t.Fatalf("%v, %v; want %v", r.Value, err, next)
		}
		if next++; next == 200 {
			s.beatAge, s.sealing.enough, s.sealing.notBefore = 1, 8000, 0
			for range 50 {
				n++
				commit(t, s, numbered(n))
			}
		}
	}
	if next != 600 {
		t.Errorf("the reader got to %v, want 599", next-1)
	}
	if blocks, _ := sealedGroups(t, s); blocks == 0 {
		t.Error("nothing was sealed")
	}
}

// TestSealLeavesDamage meets a damaged group: those around it are sealed, it stays
// to be told.
func TestSealLeavesDamage(t *testing.T) {
	path, _, _ := sample(t)
	editFile(t, path, func(tx *bolt.Tx) error {
		c := tx.Bucket(bucketJournal).Cursor()
		c.First()
		k, _ := c.Next()
		own := tx.Bucket(bucketJournal).Bucket(k)
		records := slices.Clone(own.Get(keyRecords))
		records[len(records)/2] ^= 1
		return own.Put(keyRecords, records)
	})
	s := openStore(t, path, Options{})
	s.groupBytes, s.sealing.enough, s.beatAge = 6000, 4000, 10*second
	for n := range uint64(300) {
		commit(t, s, numbered(damageNumbers+1+n))
	}
	told, found := 0, 0
	for _, err := range s.Readings(1, 0, math.MaxInt64) {
		if err != nil {
			told++
		} else {
			found++
		}
	}
	if told != 1 || found < 700 || found >= 900 {
		t.Errorf("%d errors, %d readings of 900", told, found)
	}
	blocks, groups := sealedGroups(t, s)
	if blocks < 3 || groups > 6 {
		t.Errorf("%d blocks and %d groups", blocks, groups)
	}
}

// TestBlockDamage changes a bit in a column: the tag's error is told, the others come.
func TestBlockDamage(t *testing.T) {
	path, _, _ := sample(t)
	editFile(t, path, func(tx *bolt.Tx) error {
		sealed := tx.Bucket(bucketSealed)
		k, _ := sealed.Cursor().First()
		block := slices.Clone(sealed.Bucket(k).Get(keyRecords))
		block[len(block)-9] ^= 1 // within the last tag's
		return sealed.Bucket(k).Put(keyRecords, block)
	})
	s := openStore(t, path, Options{})
	if got := drain(t, s.Readings(1, 0, math.MaxInt64)); len(got) != damageNumbers {
		t.Errorf("%d readings of the first tag, want %d", len(got), damageNumbers)
	}
	told, found := 0, 0
	for _, err := range s.Readings(50, 0, math.MaxInt64) {
		if err != nil {
			told++
		} else {
			found++
		}
	}
	if told != 1 || found == 0 {
		t.Errorf("%d errors and %d readings of the last tag", told, found)
	}
}

// FuzzBlock gives any bytes as a block with checksums that fit its head: nothing
// may panic.
func FuzzBlock(f *testing.F) {
	s := newSpan(1)
	s.add(plant(0, 10, 20))
	cols := columns{}
	for _, b := range plant(0, 10, 20) {
		for _, r := range b.Readings {
			cols.add(r)
		}
	}
	w := packed(cols, s)
	f.Add(s.name(), w.block(), uint32(3))
	f.Add(s.name(), binary.LittleEndian.AppendUint32([]byte{0}, checksum(headKey(s.name()), []byte{0})), uint32(0))
	f.Fuzz(func(t *testing.T, name, block []byte, tag uint32) {
		n := 0
		err := eachReading(name, block, tag, func(r Reading) bool {
			n++
			return r.Tag == tag && n < 1000
		})
		if err == nil && n > 1000 {
			t.Errorf("%d readings after the caller stopped", n)
		}
	})
}
