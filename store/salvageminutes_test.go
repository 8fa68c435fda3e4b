package store

import (
	"bytes"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"testing"

	bolt "go.etcd.io/bbolt"
)

const salvageStart = 80_000 * sealedSpan

// sealedSample is a closed file with a day of minutes of loads 1, 2 and 9, all but the last
// hours of which are sealed, and its bytes.
func sealedSample(t *testing.T) (path string, whole []byte) {
	t.Helper()
	path = filepath.Join(t.TempDir(), "history.db")
	s, err := Open(path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	s.db.NoSync, s.minuteSealing.after = true, 0
	for i := range int64(1500) {
		at := salvageStart + i*60*second
		commit(t, s, Batch{Minutes: []Minute{wave(1, at), wave(2, at), wave(9, at)}})
	}
	if blocks, keys := sealedCount(t, s); blocks != 8 || keys != 120 {
		t.Fatalf("%d blocks and %d keys", blocks, keys)
	}
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
	if whole, err = os.ReadFile(path); err != nil {
		t.Fatal(err)
	}
	return path, whole
}

// salvagedMinutes salvages a file of waves and returns how many minutes there are of each
// load, all of which must be as they were.
func salvagedMinutes(t *testing.T, from string) (r Report, n map[uint32]int) {
	t.Helper()
	to := filepath.Join(t.TempDir(), "to.db")
	r, err := Salvage(from, to)
	if err != nil {
		t.Fatal(err)
	}
	s := openStore(t, to, Options{})
	n = map[uint32]int{}
	total := int64(0)
	for load := range uint32(16) {
		for _, m := range drain(t, s.Minutes(load, math.MinInt64, math.MaxInt64)) {
			if m != wave(load, m.Start) {
				t.Fatalf("%+v is not as it was", m)
			}
			n[load]++
			total++
		}
	}
	if total != r.Minutes.Count {
		t.Errorf("%d minutes are there: %+v", total, r)
	}
	return r, n
}

// TestSalvageSealedMinutes salvages a sound file, and one in which a column of a block is
// damaged: what is beside that is saved, and the loss is told.
func TestSalvageSealedMinutes(t *testing.T) {
	path, _ := sealedSample(t)
	if r, n := salvagedMinutes(t, path); !r.Whole() || n[1] != 1500 || n[2] != 1500 || n[9] != 1500 {
		t.Errorf("%v: %+v", n, r)
	}
	editFile(t, path, func(tx *bolt.Tx) error {
		key, block := minuteBlock(tx, salvageStart, 2)
		b := slices.Clone(block)
		b[len(b)-20] ^= 4
		return putMinuteBlock(tx, key, b)
	})
	editFile(t, path, func(*bolt.Tx) error { return nil }) // so that the state before has it too
	r, n := salvagedMinutes(t, path)
	if r.Whole() || n[1] != 1500 || n[2] != 1140 || n[9] != 1500 || r.LostMinutes.Count != 360 || r.DamagedMinutes.Count != 1 || r.Hours.Count != 72 {
		t.Errorf("with a damaged column %v: %+v", n, r)
	}
}

// TestSalvageMinutesOfTheStateBefore damages a block whose keys the newest state has just
// removed: the state before still has them. What came late, and is sealed, is as it was then.
func TestSalvageMinutesOfTheStateBefore(t *testing.T) {
	path := filepath.Join(t.TempDir(), "history.db")
	s, err := Open(path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	s.minuteSealing.after = math.MaxInt64
	for i := range int64(420) {
		at := salvageStart + i*60*second
		late := wave(1, at)
		if i == 5 {
			late.Given = 1 // to be replaced
		}
		commit(t, s, Batch{Minutes: []Minute{late, wave(2, at), wave(9, at)}})
	}
	commit(t, s, Batch{Minutes: []Minute{wave(1, salvageStart+5*60*second)}})
	s.minuteSealing.after, s.minuteSealing.newest = 0, salvageStart+419*60*second
	for s.minuteSealing.span != salvageStart || s.minuteSealing.busy {
		if cost, err := s.minuteStep(); err != nil || cost == 0 {
			t.Fatalf("%d, %v", cost, err)
		}
	}
	if blocks, keys := sealedCount(t, s); blocks != 2 || keys != 120 {
		t.Fatalf("%d blocks and %d keys", blocks, keys)
	}
	file, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	var last []byte // of load 2's column
	err = s.view(func(tx *bolt.Tx) error {
		_, block := minuteBlock(tx, salvageStart, 2)
		last = slices.Clone(block[len(block)-40:])
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if err := s.db.Close(); err != nil { // as a kill leaves it
		t.Fatal(err)
	}
	at := bytes.Index(file, last)
	file[at+10] ^= 1
	from := filepath.Join(t.TempDir(), "from.db")
	rewrite(t, from, file)
	r, n := salvagedMinutes(t, from)
	if n[1] != 420 || n[2] != 420 || n[9] != 420 || r.LostMinutes.Count != 0 || r.DamagedMinutes.Count != 1 {
		t.Errorf("%v: %+v", n, r)
	}
}

// TestSalvageSealedDamage wipes pages and changes bytes of a file whose minutes are sealed:
// no minute comes that was not, and what is lost of hours that are there is told.
func TestSalvageSealedDamage(t *testing.T) {
	t.Parallel()
	_, whole := sealedSample(t)
	used := len(bytes.TrimRight(whole, "\x00"))
	size, rng := os.Getpagesize(), rand.New(rand.NewPCG(31, 32))
	from := filepath.Join(t.TempDir(), "from.db")
	lost := 0
	for n := range 24 {
		b := slices.Clone(whole)
		if at := rng.IntN(used); n%2 == 0 {
			clear(b[at/size*size : at/size*size+size])
		} else {
			for i := range min(200, used-at) {
				b[at+i] ^= byte(rng.Uint32())
			}
		}
		rewrite(t, from, b)
		r, found := salvagedMinutes(t, from)
		if found[1]+found[2]+found[9] < 4500 {
			lost++
			if r.Whole() {
				t.Errorf("%v are there: %+v", found, r)
			}
		}
	}
	if lost == 0 {
		t.Error("nothing was lost")
	}
}
