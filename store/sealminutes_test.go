package store

import (
	"bytes"
	"encoding/binary"
	"errors"
	"log/slog"
	"math"
	"math/rand/v2"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"
)

// sealedCount counts the blocks of minutes, and the keys of those that are in none.
func sealedCount(t testing.TB, s *Store) (blocks, keys int) {
	t.Helper()
	err := s.view(func(tx *bolt.Tx) error {
		blocks, keys = countEvents(minuteBlocks(tx)), countEvents(tx.Bucket(bucketMinutes))
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return blocks, keys
}

// neverSeals is a store whose minutes are never sealed.
func neverSeals(t testing.TB, o Options) *Store {
	s := newStore(t, o)
	s.minuteSealing.after = math.MaxInt64
	return s
}

// sameRecords compares all minutes and hours of two stores.
func sameRecords(t *testing.T, got, want *Store, loads ...uint32) {
	t.Helper()
	for _, load := range loads {
		a, b := drain(t, got.Minutes(load, math.MinInt64, math.MaxInt64)), drain(t, want.Minutes(load, math.MinInt64, math.MaxInt64))
		if !slices.Equal(a, b) {
			t.Errorf("load %d has %d minutes, want %d", load, len(a), len(b))
		}
		g, w := drain(t, got.Hours(load, math.MinInt64, math.MaxInt64)), drain(t, want.Hours(load, math.MinInt64, math.MaxInt64))
		if !slices.Equal(g, w) {
			t.Errorf("load %d has the hours\n%+v, want\n%+v", load, g, w)
		}
	}
}

// TestSealMinutes commits thirty hours of minutes of loads under three keys, one of which does
// not have all, and late ones after them: a store that seals them tells the same as one that
// does not, before and after a reopening and to one who only reads.
func TestSealMinutes(t *testing.T) {
	t.Parallel()
	path := filepath.Join(t.TempDir(), "history.db")
	s, err := Open(path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	s.db.NoSync = true
	plain := neverSeals(t, Options{})
	loads := []uint32{1, 2, 9, 31}
	const start, minutes = 80_000 * sealedSpan, 30 * 60
	rng := rand.New(rand.NewPCG(2, 2))
	both := func(b Batch) {
		commit(t, s, b)
		commit(t, plain, b)
	}
	for i := range int64(minutes) {
		var b Batch
		for _, load := range loads {
			if load != 31 || i%100 < 40 {
				b.Minutes = append(b.Minutes, measured(rng, load, start+i*60*second))
			}
		}
		if i%97 == 0 { // one that comes late, and one again that is sealed
			b.Minutes = append(b.Minutes, measured(rng, 4, start+i*30*second), measured(rng, 9, start+i*20*second))
		}
		both(b)
	}
	for range 30 {
		both(Batch{})
	}
	blocks, keys := sealedCount(t, s)
	if blocks < 4*3 || keys > 3*60*12 {
		t.Errorf("%d blocks and %d keys", blocks, keys)
	}
	loads = append(loads, 4, 3)
	sameRecords(t, s, plain, loads...)
	from, to := int64(start+5*hourNanos), int64(start+7*hourNanos)
	if got, want := drain(t, s.Minutes(9, from, to)), drain(t, plain.Minutes(9, from, to)); len(got) < 120 || !sameMinutes(got, want) {
		t.Errorf("%d minutes of two hours over the end of a block", len(got))
	}
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
	reader, err := OpenReadOnly(path)
	if err != nil {
		t.Fatal(err)
	}
	sameRecords(t, reader, plain, loads...)
	if err := reader.Close(); err != nil {
		t.Fatal(err)
	}
	s = openStore(t, path, Options{})
	both(Batch{Minutes: []Minute{measured(rng, 2, start+61*second), measured(rng, 2, start+minutes*60*second)}})
	sameRecords(t, s, plain, loads...)
	for range 5 { // each commit does a step
		both(Batch{})
	}
	if again, _ := sealedCount(t, s); again != blocks {
		t.Errorf("%d blocks, want %d", again, blocks)
	}
	sameRecords(t, s, plain, loads...)
}

// TestSealMinutesByStep looks at all minutes after each step of sealing, in which a late one
// comes: none is there twice, or not there.
func TestSealMinutesByStep(t *testing.T) {
	t.Parallel()
	s, plain := newStore(t, Options{}), neverSeals(t, Options{})
	const start = 80_000 * sealedSpan
	s.minuteSealing.after = math.MaxInt64
	both := func(b Batch) {
		commit(t, s, b)
		commit(t, plain, b)
	}
	for i := range int64(420) {
		b := Batch{}
		for load := range uint32(24) {
			b.Minutes = append(b.Minutes, wave(load, start+i*60*second))
		}
		both(b)
	}
	s.minuteSealing.after = 0
	steps, removing := 0, 0
	for ; steps < 100; steps++ {
		cost, err := s.minuteStep()
		if err != nil {
			t.Fatal(err)
		}
		if cost == 0 {
			break
		}
		sameRecords(t, s, plain, 0, 23)
		if z := &s.minuteSealing; z.busy && len(z.loads) == 0 {
			removing++
		}
		if steps == 2 || steps == 8 {
			m := wave(23, start+int64(steps)*60*second)
			m.Given++
			m.Duty += 100
			b := Batch{Minutes: []Minute{m, wave(23, start+419*60*second)}}
			s.minuteSealing.after = math.MaxInt64 // no step beside this one
			both(b)
			s.minuteSealing.after = 0
			sameRecords(t, s, plain, 0, 23)
		}
	}
	if blocks, keys := sealedCount(t, s); blocks != 3 || keys != 60*3 || removing < 3 {
		t.Errorf("after %d steps there are %d blocks and %d keys; %d steps removed keys", steps, blocks, keys, removing)
	}
	sameRecords(t, s, plain, 0, 7, 8, 23)
}

// TestSealMinutesLeavesDamage has keys of minutes that cannot be read when their span is
// sealed: they stay to be told, what is beside them is sealed, and no late minute brings
// back what a block has of them.
func TestSealMinutesLeavesDamage(t *testing.T) {
	var log bytes.Buffer
	s := newStore(t, Options{Log: slog.New(slog.NewTextHandler(&log, nil))})
	const start = 80_000 * sealedSpan
	s.minuteSealing.after = math.MaxInt64
	for i := range int64(420) {
		commit(t, s, Batch{Minutes: []Minute{wave(3, start+i*60*second), wave(4, start+i*60*second)}})
	}
	tear(t, s, start+7*60*second, 3)
	s.minuteSealing.after = 0
	for range 6 {
		commit(t, s, Batch{})
	}
	if blocks, keys := sealedCount(t, s); blocks != 1 || keys != 61 || s.Damaged() != 1 || !strings.Contains(log.String(), "damaged records") {
		t.Fatalf("%d blocks and %d keys; %d are damaged: %s", blocks, keys, s.Damaged(), &log)
	}
	for _, load := range []uint32{3, 4} {
		told, found := 0, 0
		for _, err := range s.Minutes(load, start, start+hourNanos) {
			if err == nil {
				found++
			} else if told++; !errors.Is(err, ErrDamaged) {
				t.Error(err)
			}
		}
		if told != 1 || found != 59 {
			t.Errorf("load %d: %d errors and %d minutes", load, told, found)
		}
		if got, told := hourOfLoad(s, load, start); len(told) != 0 || len(got) != 1 || got[0].Minutes != 60 || got[0].Given != 183_000 {
			t.Errorf("the hour of load %d is %+v, %v", load, got, told)
		}
	}
}

// damageBlock changes a bit in the last column of a block.
func damageBlock(t *testing.T, s *Store, start int64, load uint32) {
	t.Helper()
	err := s.db.Update(func(tx *bolt.Tx) error {
		key, block := minuteBlock(tx, start, load)
		b := slices.Clone(block)
		b[len(b)-20] ^= 4
		return putMinuteBlock(tx, key, b)
	})
	if err != nil {
		t.Fatal(err)
	}
}

// TestDamagedMinuteBlock damages one load's column in a block: its readers are told, the load
// beside it is as it was. Late minutes of either are kept, are sealed no more, and no hour
// that was built is built of less.
func TestDamagedMinuteBlock(t *testing.T) {
	s := newStore(t, Options{})
	s.minuteSealing.after = 0
	const start = 80_000 * sealedSpan
	for i := range int64(420) {
		commit(t, s, Batch{Minutes: []Minute{wave(3, start+i*60*second), wave(4, start+i*60*second)}})
	}
	damageBlock(t, s, start, 4)
	if got := drain(t, s.Minutes(3, start, start+hourNanos)); len(got) != 60 {
		t.Errorf("%d minutes of the load beside it", len(got))
	}
	late := func(load uint32) Minute {
		m := wave(load, start+5*60*second)
		m.Given += 1000
		return m
	}
	commit(t, s, Batch{Minutes: []Minute{late(3), late(4)}})
	if s.Damaged() != 1 { // the hour of load 4 lacks minutes
		t.Errorf("%d records are damaged, want 1", s.Damaged())
	}
	for range 6 {
		commit(t, s, Batch{Minutes: []Minute{wave(3, start+420*60*second)}})
	}
	if blocks, keys := sealedCount(t, s); blocks != 1 || keys != 62 || s.Damaged() != 2 { // the block cannot be made again
		t.Errorf("%d blocks and %d keys, %d are damaged; want 1, 62 and 2", blocks, keys, s.Damaged())
	}
	for _, load := range []uint32{3, 4} {
		if got, told := hourOfLoad(s, load, start); len(told) != 0 || len(got) != 1 || got[0].Minutes != 60 || got[0].Given != 183_000 {
			t.Errorf("the hour of load %d is %+v, %v", load, got, told)
		}
	}
	told, found := 0, 0
	for m, err := range s.Minutes(4, start, start+6*hourNanos) {
		if err != nil {
			told++
		} else if found++; m != late(4) {
			t.Errorf("%+v", m)
		}
	}
	if told != 1 || found != 1 {
		t.Errorf("of the damaged column %d errors and %d minutes are told", told, found)
	}
}

// TestMarkOverSealedMinutes damages the mark of the hours where nearly all minutes are sealed:
// the hours are built again, and are the same.
func TestMarkOverSealedMinutes(t *testing.T) {
	s := newStore(t, Options{})
	s.minuteSealing.after = 0
	const start = 80_000 * sealedSpan
	rng := rand.New(rand.NewPCG(2, 3))
	for i := range int64(1000) {
		commit(t, s, Batch{Minutes: []Minute{measured(rng, 3, start+i*60*second), measured(rng, 12, start+i*60*second)}})
	}
	before := drain(t, s.Hours(12, start, math.MaxInt64))
	spoil(t, s, bucketMeta, keyHours)
	if told := drain(t, s.Hours(12, start, math.MaxInt64)); !slices.Equal(told, before) {
		t.Errorf("without the mark the hours are %+v\nwant %+v", told, before)
	}
	commit(t, s, Batch{})
	if after := drain(t, s.Hours(12, start, math.MaxInt64)); !slices.Equal(after, before) || len(before) != 17 {
		t.Errorf("%d hours were %+v\nand are %+v", len(before), before, after)
	}
}

// TestTrimSealedMinutes trims by age: blocks go as a whole, and not a key before the block
// that it stands before. Then by bytes: the oldest go first, and all blocks before the keys.
func TestTrimSealedMinutes(t *testing.T) {
	t.Parallel()
	s := newStore(t, Options{MaxAge: 24 * time.Hour})
	s.minuteSealing.after = 0
	const start = 80_000 * sealedSpan
	rng := rand.New(rand.NewPCG(2, 3))
	const minutes = 3 * 1440
	for i := range int64(minutes) {
		commit(t, s, Batch{Minutes: []Minute{measured(rng, 3, start+i*60*second), measured(rng, 12, start+i*60*second)}})
	}
	s.minuteSealing.after = math.MaxInt64
	const end = start + minutes*60*second
	const changed = end - 24*hourNanos - 3*hourNanos
	commit(t, s, Batch{Minutes: []Minute{measured(rng, 3, changed), measured(rng, 3, end)}})
	want := drain(t, s.Minutes(3, changed, changed+1))
	removed, err := s.Trim(end - 2*hourNanos) // the limit is an hour after changed, in its block
	if err != nil || removed.Damaged != 0 {
		t.Fatalf("%+v, %v", removed, err)
	}
	if got := drain(t, s.Minutes(3, changed, changed+1)); !sameMinutes(got, want) || len(got) != 1 {
		t.Errorf("the changed minute is %+v, want %+v", got, want)
	}
	left := drain(t, s.Minutes(12, 0, math.MaxInt64))
	if first := left[0].Start; first != spanOf(end-26*hourNanos) || int(removed.Minutes) != 2*(minutes-len(left)) {
		t.Errorf("minutes begin %v before the end; %+v", time.Duration(end-first), removed)
	}
	if removed, err = s.Trim(end + 4*hourNanos); err != nil || len(drain(t, s.Minutes(3, changed, changed+1))) != 0 {
		t.Errorf("the changed minute outlives its block: %+v, %v", removed, err)
	}
	s.maxAge, s.maxBytes = 0, 1
	if removed, err = s.Trim(end); err != nil || removed.Minutes == 0 {
		t.Fatalf("%+v, %v", removed, err)
	}
	if blocks, keys := sealedCount(t, s); blocks != 0 || keys != 1 {
		t.Errorf("%d blocks and %d keys are left of the newest hour", blocks, keys)
	}
	if n := len(drain(t, s.Hours(12, 0, math.MaxInt64))); n != 0 { // they went last
		t.Errorf("%d hours", n)
	}
}

// TestTrimWhileSealing trims a block away whose keys are about to be removed: these stay.
func TestTrimWhileSealing(t *testing.T) {
	s := newStore(t, Options{})
	s.minuteSealing.after = math.MaxInt64
	const start = 80_000 * sealedSpan
	for i := range int64(420) {
		commit(t, s, Batch{Minutes: []Minute{wave(3, start+i*60*second)}})
	}
	s.minuteSealing.after = 0
	for range 2 {
		if cost, err := s.minuteStep(); err != nil || cost == 0 {
			t.Fatalf("%d, %v", cost, err)
		}
	}
	if blocks, keys := sealedCount(t, s); blocks != 1 || keys != 420 {
		t.Fatalf("%d blocks and %d keys", blocks, keys)
	}
	s.full, s.maxBytes = false, s.Bytes()-1
	if _, err := s.Trim(start); err != nil {
		t.Fatal(err)
	}
	commit(t, s, Batch{})
	if got := drain(t, s.Minutes(3, 0, math.MaxInt64)); len(got) != 420 {
		t.Errorf("%d minutes are left", len(got))
	}
}

// TestUpgradeSecond opens a file of the second layout: all that it holds is there, its
// minutes are sealed as commits go on, and it cannot be read without leave to write.
func TestUpgradeSecond(t *testing.T) {
	path := unpacked(t, "layout2.db.gz")
	if r, err := OpenReadOnly(path); err == nil || !strings.Contains(err.Error(), "it has layout version 2, and version 3 is read") {
		t.Errorf("%v, %v", r, err)
	}
	s := openStore(t, path, Options{})
	s.minuteSealing.after = 0
	for n := uint64(600); n < 760; n++ {
		testNumbered(t, s, n)
		for _, load := range []uint32{2, 12} {
			all := drain(t, s.Minutes(load, math.MinInt64, math.MaxInt64))
			want := wave(load, all[7].Start)
			want.Uncertain, want.Expected, want.ExpectedError = 0, 0, 0 // which that layout did not tell
			if len(all) != 600 || all[7] != want || all[7].Start != 8*60*second {
				t.Fatalf("load %d has %d minutes", load, len(all))
			}
		}
		if n == 600 {
			if blocks, _ := sealedCount(t, s); blocks != 0 {
				t.Errorf("%d blocks are there before a commit", blocks)
			}
		}
		commit(t, s, numbered(n+1))
	}
	if blocks, keys := sealedCount(t, s); blocks != 4 || keys != 761-720 {
		t.Errorf("%d blocks and %d keys", blocks, keys)
	}
}

// TestSealFirstLayout seals minutes that have more digits than those of this layout: they come
// back with all of them.
func TestSealFirstLayout(t *testing.T) {
	s := newStore(t, Options{})
	const start = 80_000 * sealedSpan
	var want []Minute
	err := s.db.Update(func(tx *bolt.Tx) error {
		for i := range int64(360) {
			m := Minute{Load: 3, Start: start + i*60*second, Measured: 60, Given: math.Sqrt(float64(i)), Duty: math.Sqrt(float64(i)) / 60, Inlet: 300 + math.Sqrt(float64(i))}
			want = append(want, m)
			key := minuteKey(m.Start, m.Load)
			value := appendFirst(nil, m)
			if err := tx.Bucket(bucketMinutes).Put(key, binary.LittleEndian.AppendUint32(value, checksum(key, value))); err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	for range 6 {
		commit(t, s, Batch{Minutes: []Minute{wave(3, start+9*hourNanos)}})
	}
	if blocks, keys := sealedCount(t, s); blocks != 1 || keys != 1 {
		t.Errorf("%d blocks and %d keys", blocks, keys)
	}
	if got := drain(t, s.Minutes(3, start, start+6*hourNanos)); !sameMinutes(got, want) {
		t.Errorf("%d minutes are not as they were", len(got))
	}
}
