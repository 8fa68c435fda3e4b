package store

import (
	"bytes"
	"errors"
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"

	bolt "go.etcd.io/bbolt"
)

// salvaged salvages the bytes of a damaged file of numbered batches. It holds the result
// against what was written: nothing may be there that was not, and what is counted as saved
// and as lost must be all of it where the newest is not lost.
func salvaged(t *testing.T, dir string, damaged []byte) Report {
	t.Helper()
	from, to := filepath.Join(dir, "from.db"), filepath.Join(dir, "to.db")
	rewrite(t, from, damaged)
	os.Remove(to)
	r, err := Salvage(from, to)
	if err != nil {
		t.Fatal(err)
	}
	if now, err := os.ReadFile(from); err != nil || string(now) != string(damaged) {
		t.Fatalf("the damaged file was changed: %v", err)
	}
	boltCheck(t, to)
	s, err := Open(to, Options{})
	if err != nil {
		t.Fatalf("open what was salvaged: %v", err)
	}
	defer s.Close()
	compareNumbered(t, s, r)
	return r
}

func compareNumbered(t *testing.T, s *Store, r Report) {
	t.Helper()
	readings := int64(0)
	last := int64(0)
	for tag := range uint32(52) {
		for x, err := range s.Readings(tag, math.MinInt64, math.MaxInt64) {
			n := x.At / second
			want := math.Sqrt(float64(n))
			if tag == 1 {
				want = float64(n)
			}
			if err != nil || n < 1 || n > damageNumbers || x.Value != want || tag > 1 && int64(tag) >= 2+n%50 {
				t.Fatalf("tag %d: %+v, %v", tag, x, err)
			}
			readings++
			last = max(last, n)
		}
	}
	trimmed := trimmedUntil(t, s)
	minutes, untold := int64(0), max(0, trimmed/(60*second)-1)
	for m, err := range s.Minutes(1, math.MinInt64, math.MaxInt64) {
		n := float64(m.Start / (60 * second))
		if err != nil || n < 1 || n > damageNumbers || m.Given != n || m.Duty != n {
			t.Fatalf("%+v, %v", m, err)
		}
		minutes++
		if m.Start < trimmed {
			untold--
		}
	}
	events := int64(0)
	for e, err := range s.Events(math.MinInt64, math.MaxInt64) {
		begun, _ := eventOf(e.Number)
		ended, _ := eventOf(e.Number + 3)
		if err != nil || e != begun && e != ended || e.Number > damageNumbers {
			t.Fatalf("%+v, %v", e, err)
		}
		events++
	}
	if events != r.Events.Count {
		t.Fatalf("%d events are there: %+v", events, r)
	}
	hours := 0
	for h, err := range s.Hours(1, math.MinInt64, math.MaxInt64) {
		if err != nil || h.Minutes > 60 || h.Minutes == 0 {
			t.Fatalf("%+v, %v", h, err)
		}
		hours++
	}
	sites, err := s.Sites()
	if err != nil || int64(len(sites)) != r.Sites.Count {
		t.Fatalf("%d site files, %v: %+v", len(sites), err, r)
	}
	for _, f := range sites {
		want, ok := siteOf(uint64(f.From / second))
		text, err := s.SiteText(f.Digest)
		if !ok || f.Digest != want.Digest || err == nil && string(text) != string(want.Text) || err != nil && !errors.Is(err, errMissing) {
			t.Fatalf("%+v: %q, %v", f, text, err)
		}
	}
	if readings != r.Readings.Count || minutes != r.Minutes.Count {
		t.Fatalf("%d readings and %d minutes are there: %+v", readings, minutes, r)
	}
	if trimmed > 0 && r.Unreadable == 0 {
		t.Fatalf("minutes are taken to be trimmed, and the file for sound: %+v", r)
	}
	if all := minutes + r.LostMinutes.Count + untold; r.Hours.Count == 10 && (all < 599 || all > 600) {
		t.Fatalf("%d minutes are saved, told as lost or taken to be trimmed: %+v", all, r)
	}
	if kept := r.Earlier + r.Batches.Count + r.LostBatches.Count; kept > damageNumbers || last == damageNumbers && kept != damageNumbers {
		t.Fatalf("%d batches up to number %d are told: %+v", kept, last, r)
	}
	if _, err := lastNumber(s); r.State && err != nil {
		t.Fatalf("the state is kept, and what follows is %v", err)
	}
	for _, err := range s.Before(math.MaxInt64 / 2) {
		if err != nil {
			t.Fatalf("Before: %v", err)
		}
	}
	registers, err := s.Registers()
	if err != nil || r.Registers && (len(registers) != 1 || registers[0].Given != damageNumbers*(damageNumbers+1)/2 && registers[0].Given != (damageNumbers-1)*damageNumbers/2) {
		t.Fatalf("registers %+v, %v", registers, err)
	}
	if names, err := s.Names("tag"); err != nil || r.Names != (len(names) == 3) {
		t.Fatalf("names %v, %v", names, err)
	}
	if id, err := s.ID("tag", "fresh"); err != nil || r.Names && id != 4 || minutes > 0 && id < 2 || readings > 1e4 && !r.Names && id < 51 {
		t.Fatalf("a fresh name has number %d, %v", id, err)
	}
	if err := s.Commit(Batch{Beats: []Beat{{Through: 1e15}}, Minutes: []Minute{{Load: 1, Start: 1e15}}, Registers: registers, Checkpoint: []byte{}}); err != nil {
		t.Fatalf("commit: %v", err)
	}
}

// trimmedUntil returns when the minutes begin that s does not take to be trimmed, or
// something negative where it takes none to be. No numbered history is trimmed, but when
// the mark is lost that tells so, those before the first that is saved are taken to be.
func trimmedUntil(t *testing.T, s *Store) (at int64) {
	t.Helper()
	err := s.db.View(func(tx *bolt.Tx) error {
		mark, ok := readHourMark(tx)
		if at = mark.trimmed; !ok {
			t.Error("what was salvaged has no mark of its hours")
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return at
}

// TestSalvageWhole salvages a sound file: all is there.
func TestSalvageWhole(t *testing.T) {
	_, whole, _ := sample(t)
	r := salvaged(t, t.TempDir(), whole)
	if !r.Whole() || r.Batches.Count != damageNumbers || r.Minutes.Count != damageNumbers || r.Events.Count != damageNumbers/11 || r.Readings.From != second || r.Readings.To != damageNumbers*second {
		t.Errorf("%+v", r)
	}
}

// TestSalvageFirstLayout salvages a file of the first layout.
func TestSalvageFirstLayout(t *testing.T) {
	whole, err := os.ReadFile(layout1(t))
	if err != nil {
		t.Fatal(err)
	}
	to := filepath.Join(t.TempDir(), "to.db")
	from := filepath.Join(t.TempDir(), "from.db")
	rewrite(t, from, whole)
	r, err := Salvage(from, to)
	if err != nil || !r.Whole() || r.Batches.Count != 600 || r.Minutes.Count != 600 {
		t.Fatalf("%+v, %v", r, err)
	}
	testNumbered(t, openStore(t, to, Options{}), 600)
}

var damages = flag.Int("damages", 100, "how many damaged files TestSalvageDamage salvages; at least 50")

// TestSalvageDamage damages files in a hundred places and ways: bits, runs of noise,
// pages that are wiped or copied over others, and ends that are cut off.
func TestSalvageDamage(t *testing.T) {
	t.Parallel()
	_, whole, size := sample(t)
	used := len(strings.TrimRight(string(whole), "\x00"))
	pages := used / size
	rng := rand.New(rand.NewPCG(21, 22))
	dir := t.TempDir()
	lost, saved := 0, 0
	files := *damages
	for n := range files {
		b := append([]byte{}, whole...)
		var what string
		switch at := rng.IntN(used); n % 5 {
		case 0:
			b[at] ^= 1 << rng.IntN(8)
			what = fmt.Sprintf("bit at %d", at)
		case 1:
			for i := range min(1+rng.IntN(600), used-at) {
				b[at+i] = byte(rng.Uint32())
			}
			what = fmt.Sprintf("noise at %d", at)
		case 2:
			page := at / size
			clear(b[page*size : (page+1)*size])
			what = fmt.Sprintf("page %d wiped", page)
		case 3:
			from, to := rng.IntN(pages), rng.IntN(pages)
			copy(b[to*size:(to+1)*size], b[from*size:(from+1)*size])
			what = fmt.Sprintf("page %d copied to %d", from, to)
		default:
			b = b[:at]
			what = fmt.Sprintf("cut at %d", at)
		}
		r := salvaged(t, dir, b)
		if t.Failed() {
			t.Fatal(what)
		}
		if !r.Whole() {
			lost++
		}
		saved += int(r.Batches.Count)
	}
	t.Logf("%d of %d files lost something; %.1f %% of the batches are saved", lost, files, 100*float64(saved)/float64(files*damageNumbers))
	if lost < files/5 || saved < files*damageNumbers*2/3 {
		t.Errorf("%d of %d files lost something, %d batches are saved", lost, files, saved)
	}
}

// TestSalvageMeta wipes meta pages: with one the other leads, with none the leaves are
// found one by one.
func TestSalvageMeta(t *testing.T) {
	_, whole, size := sample(t)
	for _, pages := range [][]int{{0}, {1}, {0, 1}} {
		b := append([]byte{}, whole...)
		for _, page := range pages {
			clear(b[page*size : (page+1)*size])
		}
		r := salvaged(t, t.TempDir(), b)
		if r.Batches.Count < damageNumbers*9/10 || r.Minutes.Count < damageNumbers*9/10 || r.Whole() != (len(pages) == 1) {
			t.Errorf("without meta pages %v: %+v", pages, r)
		}
	}
}

// TestSalvageLeavesOthers refuses a target that is there, and one source that is not.
func TestSalvageLeavesOthers(t *testing.T) {
	path, whole, _ := sample(t)
	to := filepath.Join(t.TempDir(), "to.db")
	rewrite(t, to, whole[:100])
	if _, err := Salvage(path, to); err == nil {
		t.Error("something was written over")
	}
	if _, err := Salvage(path+"x", to+"x"); err == nil {
		t.Error("no file gave no error")
	}
	s := openStore(t, path, Options{})
	commit(t, s, Batch{})
	if _, err := Salvage(path, to+"x"); err == nil {
		t.Error("a file that is being written was salvaged")
	}
}

// TestSalvageNoise salvages a file in which nothing is left to read, and one whose meta
// page leads to noise: both come to an end at once, and with nothing.
func TestSalvageNoise(t *testing.T) {
	_, whole, size := sample(t)
	rng := rand.New(rand.NewPCG(23, 24))
	b := append([]byte{}, whole...)
	for i := 2 * size; i < len(b); i++ {
		b[i] = byte(rng.Uint32())
	}
	for _, noise := range [][]byte{b, b[2*size:], b[:size+7], b[:3]} {
		if r := salvaged(t, t.TempDir(), noise); r.Batches.Count+r.Minutes.Count+r.Hours.Count != 0 || r.Unreadable == 0 || r.Whole() {
			t.Errorf("of noise: %+v", r)
		}
	}
}

// TestSalvageLosesTheNewest damages a record among the last of the newest state, as it is
// after a kill. The state before has that record whole, but not the batch after it: that
// one is told as lost, and the accounts do not go on as if it had never been.
func TestSalvageLosesTheNewest(t *testing.T) {
	path := filepath.Join(t.TempDir(), "history.db")
	s, err := Open(path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	for n := range uint64(9) {
		commit(t, s, numbered(n+1))
	}
	file, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	var tail []byte
	var at int
	err = s.db.View(func(tx *bolt.Tx) error {
		tail = tailRecords(tx)
		root := int(tx.Cursor().Bucket().Root()) * s.db.Info().PageSize
		at = root + bytes.Index(file[root:], tail[:20])
		return nil
	})
	if err != nil || len(tail) < 100 {
		t.Fatalf("%d bytes in the tails, %v", len(tail), err)
	}
	file[at+10] ^= 16
	from := filepath.Join(t.TempDir(), "from.db")
	rewrite(t, from, file)
	if damaged, err := Open(from, Options{}); err == nil {
		damaged.Close()
		t.Fatal("the damage is not noticed")
	}
	r, err := Salvage(from, from+".to")
	if err != nil {
		t.Fatal(err)
	}
	if r.Whole() || r.Batches.Count != 8 || r.LostBatches.Count != 1 {
		t.Errorf("%+v; want 8 batches saved and 1 lost", r)
	}
}

// TestSalvageMisplacedRoot writes the root of the state before over that of the newest, as
// a disk does that writes to the wrong place. What the newest brought is lost, and told.
func TestSalvageMisplacedRoot(t *testing.T) {
	path := filepath.Join(t.TempDir(), "history.db")
	s, err := Open(path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	for n := range uint64(9) {
		commit(t, s, numbered(n+1))
	}
	file, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	raw := openRaw(bytes.NewReader(file), int64(len(file)))
	if len(raw.metas) != 2 || raw.metas[0].root == raw.metas[1].root {
		t.Fatalf("meta pages %v", raw.metas)
	}
	page := func(m rawMeta) []byte { return file[int64(m.root)*raw.pageSize : int64(m.root+1)*raw.pageSize] }
	copy(page(raw.metas[0]), page(raw.metas[1]))
	from := filepath.Join(t.TempDir(), "from.db")
	rewrite(t, from, file)
	r, err := Salvage(from, from+".to")
	if err != nil {
		t.Fatal(err)
	}
	if r.Whole() || r.Unreadable == 0 || r.State || !r.Registers || r.Batches.Count != 8 {
		t.Errorf("%+v; want 8 batches, registers and no state", r)
	}
}
