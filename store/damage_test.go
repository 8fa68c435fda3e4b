package store

import (
	"encoding/binary"
	"errors"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"

	bolt "go.etcd.io/bbolt"
)

const damageNumbers = 600

// sample is a file with damageNumbers batches and some names, and its bytes.
func sample(t *testing.T) (path string, whole []byte, pageSize int) {
	t.Helper()
	path = filepath.Join(t.TempDir(), "history.db")
	s, err := Open(path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	s.groupBytes, s.sealing.enough, s.beatAge = 6000, 4000, 200*second
	s.minuteSealing.after = 0
	if _, err := s.IDs("tag", []string{"TT-1", "TT-2", "FT-1"}); err != nil {
		t.Fatal(err)
	}
	for n := range uint64(damageNumbers) {
		commit(t, s, numbered(n+1))
	}
	pageSize = s.db.Info().PageSize
	_, used, err := usage(s.db)
	if err != nil {
		t.Fatal(err)
	}
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
	if whole, err = os.ReadFile(path); err != nil {
		t.Fatal(err)
	}
	if len(whole)/pageSize < 100 || used < 100_000 {
		t.Fatalf("the sample has %d pages and %d bytes in use", len(whole)/pageSize, used)
	}
	return path, whole, pageSize
}

// outcome opens a damaged file and reads all of it. It returns an error that the
// file gave, or nil if nothing at all was wrong with what was read.
func outcome(t *testing.T, path string) error {
	t.Helper()
	s, err := Open(path, Options{})
	if err != nil {
		return err
	}
	defer s.Close()
	n, err := lastNumber(s)
	if err != nil {
		return err
	}
	for _, err := range s.Readings(1, 0, math.MaxInt64) {
		if err != nil {
			return err
		}
	}
	for _, err := range s.Minutes(1, 0, math.MaxInt64) {
		if err != nil {
			return err
		}
	}
	for _, err := range s.Hours(1, 0, math.MaxInt64) {
		if err != nil {
			return err
		}
	}
	if _, err := s.Registers(); err != nil {
		return err
	}
	for _, err := range s.Events(math.MinInt64, math.MaxInt64) {
		if err != nil {
			return err
		}
	}
	sites, err := s.Sites()
	if err != nil {
		return err
	}
	for _, f := range sites {
		if _, err := s.SiteText(f.Digest); err != nil {
			return err
		}
	}
	ids, err := s.Names("tag")
	if err != nil {
		return err
	}
	if len(ids) != 3 {
		t.Errorf("names are %v", ids)
	}
	// With one meta page lost, the other is a commit older.
	if n != damageNumbers && n != damageNumbers-1 {
		t.Errorf("the history ends with %d", n)
	}
	testNumbered(t, s, n)
	testSites(t, s, n)
	return nil
}

// damageError tells whether err says in our own words what is the matter.
func damageError(err error) bool {
	return errors.Is(err, ErrDamaged) || errors.Is(err, ErrVersion) || errors.Is(err, ErrEmptied)
}

func rewrite(t *testing.T, path string, b []byte) {
	t.Helper()
	if err := os.WriteFile(path, b, fileMode); err != nil {
		t.Fatal(err)
	}
}

// TestZeroedPage wipes each page in turn: either the damage is told, or the page was
// of no use.
func TestZeroedPage(t *testing.T) {
	path, whole, size := sample(t)
	told := 0
	for at := 0; at < len(whole); at += size {
		if strings.Trim(string(whole[at:at+size]), "\x00") == "" {
			continue
		}
		b := append([]byte{}, whole...)
		clear(b[at : at+size])
		rewrite(t, path, b)
		err := outcome(t, path)
		if err != nil && !damageError(err) {
			t.Errorf("page %d: %v", at/size, err)
		}
		if t.Failed() {
			t.Fatalf("page %d", at/size)
		}
		if err != nil {
			told++
		}
	}
	if told < 20 {
		t.Errorf("only %d pages gave an error", told)
	}
}

// TestFlippedBit flips bits anywhere in the pages that are in use.
func TestFlippedBit(t *testing.T) {
	path, whole, _ := sample(t)
	rng := rand.New(rand.NewPCG(3, 4))
	told := 0
	for range 400 {
		b := append([]byte{}, whole...)
		at := rng.IntN(len(b))
		for b[at] == 0 {
			at = rng.IntN(len(b))
		}
		b[at] ^= 1 << rng.IntN(8)
		rewrite(t, path, b)
		err := outcome(t, path)
		if err != nil && !damageError(err) {
			t.Errorf("byte %d: %v", at, err)
		}
		if t.Failed() {
			t.Fatalf("byte %d: %#x instead of %#x", at, b[at], whole[at])
		}
		if err != nil {
			told++
		}
	}
	if told < 40 {
		t.Errorf("only %d flips gave an error", told)
	}
}

func TestTruncated(t *testing.T) {
	path, whole, size := sample(t)
	used := len(strings.TrimRight(string(whole), "\x00"))
	for n := 0; n < used; n += used/40 + 1 {
		rewrite(t, path, whole[:n])
		err := outcome(t, path)
		want := ErrDamaged
		if n == 0 {
			want = ErrEmptied
		}
		if !errors.Is(err, want) {
			t.Errorf("%d bytes of %d (page %d): %v; want %v", n, used, n/size, err, want)
		}
		if info, err := os.Stat(path); err != nil || info.Size() != int64(n) {
			t.Fatalf("the damaged file was touched: %v, %v", info, err)
		}
	}
}

func TestMetaPages(t *testing.T) {
	path, whole, size := sample(t)
	b := append([]byte{}, whole...)
	clear(b[:2*size])
	rewrite(t, path, b)
	if err := outcome(t, path); !errors.Is(err, ErrDamaged) || !strings.Contains(err.Error(), "move the file aside") {
		t.Errorf("both meta pages wiped: %v", err)
	}
}

func TestNotAHistory(t *testing.T) {
	path := filepath.Join(t.TempDir(), "history.db")
	rewrite(t, path, []byte(strings.Repeat("temperature,flow\n", 3000)))
	if _, err := Open(path, Options{}); !errors.Is(err, ErrDamaged) {
		t.Errorf("a text file: %v", err)
	}
	other := filepath.Join(t.TempDir(), "other.db")
	editFile(t, other, func(tx *bolt.Tx) error {
		_, err := tx.CreateBucket([]byte("orders"))
		return err
	})
	if _, err := Open(other, Options{}); !errors.Is(err, ErrVersion) {
		t.Errorf("a database of something else: %v", err)
	}
}

func editFile(t *testing.T, path string, edit func(*bolt.Tx) error) {
	t.Helper()
	db, err := bolt.Open(path, fileMode, boltOptions(0))
	if err != nil {
		t.Fatal(err)
	}
	if err := errors.Join(db.Update(edit), db.Close()); err != nil {
		t.Fatal(err)
	}
}

func TestUnknownVersion(t *testing.T) {
	path, _, _ := sample(t)
	editFile(t, path, func(tx *bolt.Tx) error {
		return tx.Bucket(bucketMeta).Put(keyVersion, binary.LittleEndian.AppendUint32(nil, Version+1))
	})
	_, err := Open(path, Options{})
	if !errors.Is(err, ErrVersion) || !strings.Contains(err.Error(), "version 4") {
		t.Errorf("version %d: %v", Version+1, err)
	}
}

func TestLocked(t *testing.T) {
	path := filepath.Join(t.TempDir(), "history.db")
	openStore(t, path, Options{})
	_, err := Open(path, Options{})
	if !errors.Is(err, ErrLocked) || !strings.Contains(err.Error(), "is another agent running?") {
		t.Errorf("second Open: %v", err)
	}
}

func TestClosed(t *testing.T) {
	s := newStore(t, Options{})
	for range 2 {
		if err := s.Close(); err != nil {
			t.Errorf("Close: %v", err)
		}
	}
	if err := s.Commit(numbered(1)); err == nil {
		t.Error("Commit to a closed store gave no error")
	}
	for _, err := range s.Since() {
		if err == nil {
			t.Error("Since of a closed store gave a beat")
		}
	}
	if _, err := s.Trim(0); err == nil {
		t.Error("Trim of a closed store gave no error")
	}
}

// TestMissingGroup takes a group out of the middle, and the first one after the
// checkpoint: either is told, and the other groups still come.
func TestMissingGroup(t *testing.T) {
	for _, place := range []int{3, 0} {
		path, _, _ := sample(t)
		editFile(t, path, func(tx *bolt.Tx) error {
			// As if the checkpoint stood for what is sealed only.
			k, _ := tx.Bucket(bucketSealed).Cursor().Last()
			sealed, err := parseName(k)
			if err != nil {
				return err
			}
			if err := putCheckpoint(tx, checkpoint{true, sealed.last, []byte{}}); err != nil {
				return err
			}
			c := tx.Bucket(bucketJournal).Cursor()
			k, _ = c.First()
			for range place {
				k, _ = c.Next()
			}
			return tx.Bucket(bucketJournal).DeleteBucket(append([]byte{}, k...))
		})
		s := openStore(t, path, Options{})
		told, beats, last := 0, 0, Beat{}
		for b, err := range s.Since() {
			if err != nil {
				if told++; !errors.Is(err, ErrDamaged) || !strings.Contains(err.Error(), "are missing") {
					t.Errorf("group %d gone: %v", place, err)
				}
				continue
			}
			beats, last = beats+1, b
		}
		if told != 1 || beats < damageNumbers/3 || last.Through != damageNumbers*second {
			t.Errorf("group %d gone: told %d times, %d beats, the last %v", place, told, beats, last.Through)
		}
	}
}

// TestFreeListDamage puts a page that is in use on the list of free pages, which a later
// commit would write over: Open refuses. The same file without the list is good.
func TestFreeListDamage(t *testing.T) {
	path, whole, size := sample(t)
	meta := whole[:size]
	if b := whole[size : 2*size]; binary.LittleEndian.Uint64(b[metaID:]) > binary.LittleEndian.Uint64(meta[metaID:]) {
		meta = b
	}
	list := binary.LittleEndian.Uint64(meta[metaFree:])
	if list == noFreeList {
		t.Fatal("Close wrote no list of free pages")
	}
	root := binary.LittleEndian.Uint64(meta[metaFree-16:])
	for _, change := range []func(page []byte){
		func(page []byte) { binary.LittleEndian.PutUint64(page[pageHead:], root) },
		func(page []byte) { binary.LittleEndian.PutUint64(page[pageHead:], 1<<40) },
		func(page []byte) { copy(page[pageHead:], page[pageHead+8:pageHead+16]) },
		func(page []byte) { binary.LittleEndian.PutUint16(page[10:], 60_000) },
		func(page []byte) { binary.LittleEndian.PutUint16(page[8:], pageLeaf) },
	} {
		b := append([]byte{}, whole...)
		change(b[int(list)*size : int(list+1)*size])
		rewrite(t, path, b)
		if err := outcome(t, path); !errors.Is(err, ErrDamaged) {
			t.Errorf("with the list % x: %v", b[int(list)*size:][:pageHead+16], err)
		}
	}
	rewrite(t, path, whole)
	s := openStore(t, path, Options{})
	commit(t, s, numbered(damageNumbers+1))
	if err := s.db.Close(); err != nil { // as a kill leaves it
		t.Fatal(err)
	}
	s.closed = true
	again := openStore(t, path, Options{})
	testNumbered(t, again, damageNumbers+1)
}
