package store

import (
	"bytes"
	"errors"
	"log/slog"
	"slices"
	"strings"
	"testing"

	bolt "go.etcd.io/bbolt"
)

// tear changes a bit in the minutes of a load.
func tear(t *testing.T, s *Store, start int64, load uint32) {
	t.Helper()
	err := s.db.Update(func(tx *bolt.Tx) error {
		key := minuteKey(start, load)
		v := slices.Clone(tx.Bucket(bucketMinutes).Get(key))
		v[len(v)/2] ^= 4
		return tx.Bucket(bucketMinutes).Put(key, v)
	})
	if err != nil {
		t.Fatal(err)
	}
}

// hourOfLoad reads one hour, and the errors told beside it.
func hourOfLoad(s *Store, load uint32, start int64) (found []Hour, told []error) {
	for h, err := range s.Hours(load, start, start+hourNanos) {
		if err != nil {
			told = append(told, err)
		} else {
			found = append(found, h)
		}
	}
	return found, told
}

// TestTornMinutes damages minutes before their hour is built: a reader is told, the
// hour is built of the others, and that is logged and counted once.
func TestTornMinutes(t *testing.T) {
	var log bytes.Buffer
	s := newStore(t, Options{Log: slog.New(slog.NewTextHandler(&log, nil))})
	const start = 480_000 * hourNanos
	for minute := range int64(60) {
		at := start + minute*60*second
		commit(t, s, Batch{Minutes: []Minute{wave(3, at), wave(12, at)}})
	}
	tear(t, s, start+9*60*second, 3)  // holds 100·10 J
	tear(t, s, start+10*60*second, 3) // and 100·11 J
	for range 2 {
		found, told := hourOfLoad(s, 3, start)
		if len(told) != 2 || !errors.Is(told[0], ErrDamaged) || len(found) != 1 || found[0].Minutes != 58 || found[0].Given != 180_900 {
			t.Fatalf("the running hour is %+v, with %v", found, told)
		}
	}
	if found, told := hourOfLoad(s, 12, start); len(told) != 0 || len(found) != 1 || found[0].Minutes != 60 {
		t.Errorf("the hour of a load beside it is %+v, with %v", found, told)
	}
	if s.Damaged() != 0 || log.Len() != 0 {
		t.Errorf("%d keys are torn, and the log says %q, before the hour is built", s.Damaged(), &log)
	}
	commit(t, s, Batch{Minutes: []Minute{wave(3, start+hourNanos)}})
	commit(t, s, Batch{Minutes: []Minute{wave(3, start+hourNanos+60*second)}})
	if found, _ := hourOfLoad(s, 3, start); len(found) != 1 || found[0].Minutes != 58 || found[0].Given != 180_900 {
		t.Errorf("the hour is built as %+v", found)
	}
	if n := strings.Count(log.String(), "damaged records of the history"); s.Damaged() != 2 || n != 1 || !strings.Contains(log.String(), "keys=2") {
		t.Errorf("%d keys are torn, want 2; the log says %q", s.Damaged(), &log)
	}
}

// TestTornAfterBuilding damages a minute of an hour that was built with it, and then
// brings another minute of that hour again: what was built stays, while a load whose
// minutes are sound is built anew.
func TestTornAfterBuilding(t *testing.T) {
	s := newStore(t, Options{})
	const start = 480_000 * hourNanos
	for minute := range int64(61) {
		at := start + minute*60*second
		commit(t, s, Batch{Minutes: []Minute{wave(3, at), wave(12, at), wave(20, at)}})
	}
	tear(t, s, start, 3)
	tear(t, s, start, 20)
	more := func(load uint32) Minute {
		m := wave(load, start+60*second)
		m.Given += 1000
		return m
	}
	commit(t, s, Batch{Minutes: []Minute{more(3), more(12)}})
	for load, want := range map[uint32]float64{3: 183_000, 12: 184_000, 20: 183_000} {
		if found, told := hourOfLoad(s, load, start); len(told) != 0 || len(found) != 1 || found[0].Minutes != 60 || found[0].Given != want {
			t.Errorf("the hour of load %d is %+v, with %v; want 60 minutes of %v J", load, found, told, want)
		}
	}
	if s.Damaged() != 1 { // the minutes of load 20 were not asked for
		t.Errorf("%d keys are torn, want 1", s.Damaged())
	}
}
