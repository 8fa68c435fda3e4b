package store

import (
	"log/slog"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"
)

const day = 86_400 * second

// fill commits two hours of 5 tags and some loads in each batch, from one time
// to another, with a checkpoint each, and trims after each.
func fill(t testing.TB, s *Store, from, to int64, loads uint32, after func(at int64)) (removed Trimmed) {
	t.Helper()
	for at := from; at < to; at += 7200 * second {
		b := Batch{Beats: plant(at, 7200, 5), Checkpoint: []byte("state")}
		for minute := range int64(120) {
			for load := range loads {
				v := math.Sqrt(float64(at/second + minute))
				b.Minutes = append(b.Minutes, Minute{Load: load, Start: at + minute*60*second, Measured: 60, Given: v, Duty: v / 60, Inlet: 280 + v/1e5})
			}
		}
		b.Registers = []Register{{Load: 1, Given: float64(at)}}
		commit(t, s, b)
		got, err := s.Trim(at + 7200*second)
		if err != nil {
			t.Fatal(err)
		}
		removed.Readings += got.Readings
		removed.Minutes += got.Minutes
		if got.Damaged != 0 {
			t.Errorf("%d damaged groups", got.Damaged)
		}
		after(at + 7200*second)
	}
	return removed
}

func countReadings(t testing.TB, s *Store) (n int64, oldest int64) {
	t.Helper()
	oldest = math.MaxInt64
	for c, err := range s.chunks(0, every) {
		if err != nil {
			t.Fatal(err)
		}
		for tag := range uint32(60) {
			err := c.ofTag(tag, func(r Reading) bool {
				n++
				oldest = min(oldest, r.At)
				return true
			})
			if err != nil {
				t.Fatal(err)
			}
		}
	}
	return n, oldest
}

// TestTrimByAge fills four weeks and keeps ten days.
func TestTrimByAge(t *testing.T) {
	t.Parallel()
	const from, days, keep = 20_000 * day, 28, 10
	s := newStore(t, Options{MaxAge: keep * 24 * time.Hour})
	removed := fill(t, s, from, from+days*day, 3, func(int64) {})
	end := int64(from + days*day)
	readings, oldest := countReadings(t, s)
	if want := int64(days * 86_400 * 5 / 10); readings+removed.Readings != want {
		t.Errorf("%d readings kept, %d removed; want %d together", readings, removed.Readings, want)
	}
	// A group holds half a day or so of these.
	if oldest < end-(keep+2)*day || oldest > end-keep*day {
		t.Errorf("the oldest reading is %.2f days old, want %d to %d", float64(end-oldest)/day, keep, keep+2)
	}
	minutes := drain(t, s.Minutes(0, math.MinInt64, math.MaxInt64))
	if len(minutes) != keep*1440 || minutes[0].Start != end-keep*day {
		t.Errorf("%d minutes, the oldest %.2f days old; want %d days of them", len(minutes), float64(end-minutes[0].Start)/day, keep)
	}
	if want := int64((days - keep) * 1440 * 3); removed.Minutes != want {
		t.Errorf("%d minutes removed, want %d", removed.Minutes, want)
	}
}

// TestTrimByBytes fills ten weeks: the bound holds after every trim, the file is
// not much longer, and readings go before minutes.
//
// How much longer is left to chance: bbolt cuts what it needs off any run of free pages
// that is long enough, not the first or the shortest, and so may leave none for a block.
// The pages come to about 1 MiB more than the bound. The file itself is up to growBytes longer.
func TestTrimByBytes(t *testing.T) {
	t.Parallel()
	const bound = 4 << 20
	path := filepath.Join(t.TempDir(), "history.db")
	s := openStore(t, path, Options{MaxBytes: bound})
	s.db.NoSync = true // nothing cuts the power
	const from, days = 20_000 * day, 70
	worst := int64(0)
	removed := fill(t, s, from, from+days*day, 2, func(at int64) {
		if s.Bytes() > bound {
			t.Fatalf("day %d: %d bytes in use, bound %d", (at-from)/day, s.Bytes(), bound)
		}
		pages, _, err := usage(s.db)
		if err != nil {
			t.Fatal(err)
		}
		worst = max(worst, pages)
		step := int64(growBytes + s.db.Info().PageSize)
		if info, err := os.Stat(path); err != nil || info.Size() > worst+step {
			t.Fatalf("day %d: the file is %+v, want at most %d bytes more than the %d of its pages (%v)", (at-from)/day, info, step, worst, err)
		}
	})
	t.Logf("the pages of the file grew to %.2f of its bound", float64(worst)/bound)
	if worst > bound+2<<20 {
		t.Errorf("the pages of the file grew to %d bytes, bound %d", worst, bound)
	}
	readings, _ := countReadings(t, s)
	if readings == 0 || removed.Readings == 0 {
		t.Errorf("%d readings kept, %d removed", readings, removed.Readings)
	}
	minutes := drain(t, s.Minutes(0, math.MinInt64, math.MaxInt64))
	if removed.Minutes != 0 || len(minutes) != days*1440 {
		t.Errorf("%d minutes removed, %d of a load kept; readings were left to remove", removed.Minutes, len(minutes))
	}
}

// TestTrimMinutesLast gives less room than the minutes need.
func TestTrimMinutesLast(t *testing.T) {
	t.Parallel()
	const bound = 700 << 10
	s := newStore(t, Options{MaxBytes: bound})
	const from, days = 20_000 * day, 30
	removed := fill(t, s, from, from+days*day, 3, func(int64) {
		if s.Bytes() > bound {
			t.Fatalf("%d bytes in use, bound %d", s.Bytes(), bound)
		}
	})
	minutes := drain(t, s.Minutes(0, math.MinInt64, math.MaxInt64))
	if len(minutes) == 0 || removed.Minutes == 0 || int(removed.Minutes)+3*len(minutes) != days*1440*3 {
		t.Errorf("%d minutes removed, %d of a load kept", removed.Minutes, len(minutes))
	}
	if last := minutes[len(minutes)-1].Start; last != from+days*day-60*second {
		t.Errorf("the newest minute is missing: %d", last)
	}
	registers, err := s.Registers()
	if err != nil || len(registers) != 1 || registers[0].Given != from+days*day-7200*second {
		t.Errorf("Registers() = %v, %v", registers, err)
	}
}

// TestTrimKeepsReplay never checkpoints again: what a restart needs stays, however
// little room there is.
func TestTrimKeepsReplay(t *testing.T) {
	s := newStore(t, Options{MaxBytes: 1 << 20, MaxAge: time.Hour})
	commit(t, s, Batch{Beats: plant(0, 10, 50), Checkpoint: []byte("state")})
	var want []Beat
	for at := int64(10); at < 40_000; at += 100 {
		b := Batch{Beats: plant(at*second, 100, 50)}
		want = append(want, b.Beats...)
		commit(t, s, b)
	}
	if _, err := s.Trim(1000 * day); err != nil {
		t.Fatal(err)
	}
	if got := drain(t, s.Since()); !sameBeats(got, want) {
		t.Errorf("%d beats since the checkpoint, want %d", len(got), len(want))
	}
}

// TestCompact removes nearly all and opens again: the file is short, and the rest
// is there.
func TestCompact(t *testing.T) {
	t.Parallel()
	path := filepath.Join(t.TempDir(), "history.db")
	s, err := Open(path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	s.db.NoSync = true // nothing cuts the power
	const from, days = 20_000 * day, 36
	s.minuteSealing.after = math.MaxInt64 // so that the file grows
	fill(t, s, from, from+days*day, 3, func(int64) {})
	s.minuteSealing.after = 0
	for range days * 4 * 4 {
		commit(t, s, Batch{})
	}
	if blocks, keys := sealedCount(t, s); blocks != days*4-1 || keys != 360 {
		t.Errorf("%d blocks and %d keys", blocks, keys)
	}
	s.maxAge = 24 * time.Hour
	if _, err := s.Trim(from + 2*days*day); err != nil {
		t.Fatal(err)
	}
	before := contents(t, s)
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
	long, err := os.Stat(path)
	if err != nil {
		t.Fatal(err)
	}
	var log strings.Builder
	s = openStore(t, path, Options{Log: slog.New(slog.NewTextHandler(&log, nil))})
	short, err := os.Stat(path)
	t.Logf("%d bytes after compaction, %d before", short.Size(), long.Size())
	if err != nil || short.Size() > long.Size()/4 || short.Size() > 4<<20 {
		t.Errorf("%d bytes after compaction, %d before (%v)", short.Size(), long.Size(), err)
	}
	if !strings.Contains(log.String(), "history compacted") {
		t.Errorf("the log does not tell: %q", log.String())
	}
	if after := contents(t, s); after != before {
		t.Errorf("after compaction %+v, before %+v", after, before)
	}
	commit(t, s, Batch{Beats: plant(from+days*day, 3600, 50)})
}

type content struct {
	readings, oldest int64
	minutes          int
	given            float64
	state            string
}

func contents(t *testing.T, s *Store) (c content) {
	t.Helper()
	c.readings, c.oldest = countReadings(t, s)
	c.minutes = len(drain(t, s.Minutes(0, math.MinInt64, math.MaxInt64)))
	registers, err := s.Registers()
	if err != nil || len(registers) != 1 {
		t.Fatalf("Registers() = %v, %v", registers, err)
	}
	state, _, err := s.Checkpoint()
	if err != nil {
		t.Fatal(err)
	}
	c.given, c.state = registers[0].Given, string(state)
	return c
}

// TestFull fills the file to its greatest size. Commit says so, keeps nothing of the
// batch and goes on after a Trim, again and again, with all that is newer than
// the oldest kept.
func TestFull(t *testing.T) {
	t.Parallel()
	s := newStore(t, Options{MaxBytes: 1 << 40, MaxFile: 3 << 20})
	full := 0
	for n := uint64(1); n <= 1000 || full < 3; n++ {
		if n > 60_000 {
			t.Fatalf("full only %d times", full)
		}
		b := Batch{Beats: plant(int64(n)*100*second, 100, 50), Checkpoint: []byte{1},
			Registers: []Register{{Load: 1, Given: float64(n)}}}
		err := s.Commit(b)
		if err == nil {
			continue
		}
		if !IsFull(err) {
			t.Fatalf("batch %d: %v, which IsFull does not know", n, err)
		}
		full++
		registers, rerr := s.Registers()
		if rerr != nil || registers[0].Given != float64(n-1) {
			t.Fatalf("batch %d was refused, the register is %v, %v", n, registers, rerr)
		}
		removed, err := s.Trim(int64(n) * 100 * second)
		if err != nil || removed.Readings == 0 {
			t.Fatalf("Trim() = %+v, %v", removed, err)
		}
		commit(t, s, b)
	}
	readings, oldest := countReadings(t, s)
	registers, err := s.Registers()
	if err != nil {
		t.Fatal(err)
	}
	if want := (int64(registers[0].Given)+1)*100*5 - oldest/second*5; readings != want {
		t.Errorf("%d readings from %d s on, want %d", readings, oldest/second, want)
	}
}

// TestRootStaysOnePage commits all there is in any number of loads. Only while the
// root is one page does a small commit write two.
func TestRootStaysOnePage(t *testing.T) {
	s := newStore(t, Options{BeatAge: time.Minute})
	s.sealing.enough = 10_000
	for n := range uint64(60) {
		if _, err := s.ID("load", strings.Repeat("x", int(n)*3)); err != nil {
			t.Fatal(err)
		}
		for i := range int64(20) {
			at := (int64(n)*20 + i) * 10 * second
			commit(t, s, Batch{Beats: plant(at, 10, 50), Registers: []Register{{Load: uint32(n), Given: 1}},
				Minutes: []Minute{{Load: uint32(n), Start: at, Duty: 1}}, Checkpoint: make([]byte, 20*i)})
		}
		err := s.db.Update(func(tx *bolt.Tx) error {
			p, err := tx.Page(int(tx.Cursor().Bucket().Root()))
			if err != nil || p.Type != "leaf" || p.OverflowCount != 0 {
				t.Errorf("with %d registers the root is %+v, %v", n+1, p, err)
			}
			return err
		})
		if err != nil {
			t.Fatal(err)
		}
	}
	if blocks, _ := sealedGroups(t, s); blocks == 0 {
		t.Error("nothing was sealed")
	}
}

// TestTrimAll trims a history whose readings are all too old: records go on with the
// number that comes next, so that a restart puts them through again.
func TestTrimAll(t *testing.T) {
	path := filepath.Join(t.TempDir(), "history.db")
	s, err := Open(path, Options{MaxAge: time.Hour})
	if err != nil {
		t.Fatal(err)
	}
	s.groupBytes = 3000
	for n := range int64(40) {
		commit(t, s, Batch{Beats: plant(n*100*second, 100, 50), Checkpoint: []byte("state")})
	}
	if removed, err := s.Trim(1000 * day); err != nil || removed.Readings < 10_000 {
		t.Errorf("Trim() = %+v, %v", removed, err)
	}
	for range 3 {
		if err := s.Close(); err != nil {
			t.Fatal(err)
		}
		if s, err = Open(path, Options{MaxAge: time.Hour}); err != nil {
			t.Fatal(err)
		}
	}
	want := plant(1000*day, 100, 50)
	commit(t, s, Batch{Beats: want})
	if got := drain(t, s.Since()); !sameBeats(got, want) {
		t.Errorf("%d beats since the checkpoint, want %d", len(got), len(want))
	}
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
	boltCheck(t, path)
}
