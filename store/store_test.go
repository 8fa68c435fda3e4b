package store

import (
	"math"
	"path/filepath"
	"reflect"
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"
)

// newStore opens a store in a folder of its own. When the test is over the file
// is checked.
func newStore(t testing.TB, o Options) *Store {
	t.Helper()
	s := openStore(t, filepath.Join(t.TempDir(), "history.db"), o)
	s.db.NoSync = true // nothing cuts the power
	return s
}

func openStore(t testing.TB, path string, o Options) *Store {
	t.Helper()
	s, err := Open(path, o)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := s.Close(); err != nil {
			t.Errorf("close: %v", err)
		}
		boltCheck(t, path)
	})
	return s
}

// boltCheck runs bbolt's own check on a closed file.
func boltCheck(t testing.TB, path string) {
	t.Helper()
	db, err := bolt.Open(path, fileMode, boltOptions(0))
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	err = db.View(func(tx *bolt.Tx) error {
		for err := range tx.Check() {
			t.Errorf("check of %q: %v", path, err)
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
}

func commit(t testing.TB, s *Store, b Batch) {
	t.Helper()
	if err := s.Commit(b); err != nil {
		t.Fatal(err)
	}
}

const second = 1_000_000_000

// plant makes the beats of n seconds: each of tags tags reads every 10 s.
func plant(from int64, seconds, tags int) []Beat {
	beats := make([]Beat, seconds)
	for i := range beats {
		at := from + int64(i)*second
		beats[i].Through = at
		for tag := i % 10; tag < tags; tag += 10 {
			beats[i].Readings = append(beats[i].Readings, Reading{
				Tag: uint32(tag), At: at, Stamped: true,
				Mark:  plantMark(at/second, tag),
				Value: 273.15 + math.Round(100*(60+5*math.Sin(float64(at/second+int64(tag))/50)))/100,
			})
		}
	}
	return beats
}

// plantMark is what plant marks now and then: readings that last for a while as doubted, and
// one alone as bad.
func plantMark(at int64, tag int) uint8 {
	switch {
	case at/100%23 == int64(tag%23):
		return 65
	case at/10%57 == int64(tag%57):
		return 130
	}
	return 0
}

// TestResume commits batches, some with a checkpoint, and finds after each
// reopening the state and exactly the beats since.
func TestResume(t *testing.T) {
	t.Parallel()
	path := filepath.Join(t.TempDir(), "history.db")
	var since, before []Beat
	var state string
	at := int64(1_760_000_000 * second)
	for round := range 400 {
		s, err := Open(path, Options{BeatAge: 1e6 * time.Second})
		if err != nil {
			t.Fatal(err)
		}
		got, ok, err := s.Checkpoint()
		if err != nil || string(got) != state || ok != (state != "") {
			t.Fatalf("round %d: Checkpoint() = %q, %v, %v; want %q", round, got, ok, err, state)
		}
		if got := drain(t, s.Since()); !reflect.DeepEqual(got, since) {
			t.Fatalf("round %d: %d beats since the checkpoint, want %d", round, len(got), len(since))
		}
		for range 1 + round%7 {
			b := Batch{Beats: plant(at, 10, 50)}
			at += 10 * second
			since = append(since, b.Beats...)
			if at/second%7 == 0 {
				state = string(rune('a' + round%26))
				b.Checkpoint = []byte(state)
				before, since = append(before, since...), nil
			}
			commit(t, s, b)
		}
		if round%37 == 0 {
			testBefore(t, s, before)
		}
		if err := s.Close(); err != nil {
			t.Fatal(err)
		}
	}
	boltCheck(t, path)
}

func testBefore(t *testing.T, s *Store, all []Beat) {
	t.Helper()
	for _, d := range []int64{0, 5 * second, 3600 * second, 1e6 * second} {
		var want []Beat
		for _, b := range all {
			if b.Through >= all[len(all)-1].Through-d {
				want = append(want, b)
			}
		}
		if got := drain(t, s.Before(time.Duration(d))); !reflect.DeepEqual(got, want) {
			t.Errorf("Before(%d s): %d beats, want %d", d/second, len(got), len(want))
		}
	}
}
