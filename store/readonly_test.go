package store

import (
	"bytes"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"
	berrors "go.etcd.io/bbolt/errors"
)

// held is what a file and its folder are like.
type held struct {
	bytes   []byte
	changed time.Time
	folder  []string
}

func heldIn(t *testing.T, path string) (h held) {
	t.Helper()
	var err error
	if h.bytes, err = os.ReadFile(path); err != nil {
		t.Fatal(err)
	}
	info, err := os.Stat(path)
	if err != nil {
		t.Fatal(err)
	}
	h.changed = info.ModTime()
	entries, err := os.ReadDir(filepath.Dir(path))
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		h.folder = append(h.folder, e.Name())
	}
	return h
}

func (h held) same(o held) bool {
	return bytes.Equal(h.bytes, o.bytes) && h.changed.Equal(o.changed) && slices.Equal(h.folder, o.folder)
}

// A file without leave to write, in such a folder, is read in full; it is opened by
// O_RDONLY alone, and nothing of it or beside it changes, whatever is called. For root,
// whom modes do not bind, that is the proof.
func TestReadOnly(t *testing.T) {
	path, _, _ := sample(t)
	folder := filepath.Dir(path)
	long := time.Unix(1_700_000_000, 0)
	if err := errors.Join(os.Chtimes(path, long, long), os.Chmod(path, 0o444), os.Chmod(folder, 0o555)); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { os.Chmod(folder, 0o755) })
	before := heldIn(t, path)
	var flags []int
	o := boltOptions(0)
	o.OpenFile = func(name string, flag int, mode os.FileMode) (*os.File, error) {
		flags = append(flags, flag)
		return os.OpenFile(name, flag, mode)
	}
	s, err := openReadOnly(path, o)
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(flags, []int{os.O_RDONLY}) {
		t.Errorf("opened with the flags %v", flags)
	}
	testNumbered(t, s, damageNumbers)
	if n, err := lastNumber(s); err != nil || n != damageNumbers {
		t.Errorf("it ends with %d, %v", n, err)
	}
	if s.Bytes() != int64(len(before.bytes)) {
		t.Errorf("it has %d bytes, want %d", s.Bytes(), len(before.bytes))
	}
	if ids, err := s.IDs("tag", []string{"TT-2", "FT-1"}); err != nil || len(ids) != 2 {
		t.Errorf("known names: %v, %v", ids, err)
	}
	_, unknown := s.ID("tag", "TT-9")
	_, trim := s.Trim(1 << 62)
	for what, err := range map[string]error{"commit": s.Commit(numbered(damageNumbers + 1)), "a new name": unknown, "trim": trim} {
		if !errors.Is(err, berrors.ErrDatabaseReadOnly) {
			t.Errorf("%s: %v", what, err)
		}
	}
	testNumbered(t, s, damageNumbers)
	if err := s.Close(); err != nil {
		t.Error(err)
	}
	if after := heldIn(t, path); !after.same(before) {
		t.Errorf("%d bytes of %v in %v have become %d of %v in %v", len(before.bytes), before.changed, before.folder, len(after.bytes), after.changed, after.folder)
	}
}

// Readers keep a writer out and he them, but not each other.
func TestReadOnlyShares(t *testing.T) {
	path, _, _ := sample(t)
	var readers []*Store
	for range 3 {
		s, err := OpenReadOnly(path)
		if err != nil {
			t.Fatal(err)
		}
		readers = append(readers, s)
	}
	if _, err := Open(path, Options{}); !errors.Is(err, ErrLocked) {
		t.Errorf("a writer beside readers: %v", err)
	}
	for _, s := range readers {
		testNumbered(t, s, damageNumbers)
		if err := s.Close(); err != nil {
			t.Error(err)
		}
	}
	w, err := Open(path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer w.Close()
	if _, err := OpenReadOnly(path); !errors.Is(err, ErrLocked) || !strings.Contains(err.Error(), "file is locked (waited 200ms); does an agent run on it?") {
		t.Errorf("a reader beside a writer: %v", err)
	}
}

// What cannot be read is told, and left as it is.
func TestReadOnlyRefusals(t *testing.T) {
	damaged, whole, size := sample(t)
	b := bytes.Clone(whole)
	clear(b[2*size : 40*size])
	rewrite(t, damaged, b)
	stranger := filepath.Join(t.TempDir(), "stranger.db")
	db, err := bolt.Open(stranger, fileMode, nil)
	if err != nil {
		t.Fatal(err)
	}
	if err := db.Close(); err != nil {
		t.Fatal(err)
	}
	empty := filepath.Join(t.TempDir(), "empty.db")
	rewrite(t, empty, nil)
	for _, tt := range []struct {
		path string
		is   error
		says string
	}{
		{damaged, ErrDamaged, ""},
		{stranger, ErrVersion, "so it is not a history"},
		{empty, ErrEmptied, "read a backup"},
		{layout1(t), nil, "it has layout version 1, and version 3 is read; start the agent once on it"},
	} {
		before := heldIn(t, tt.path)
		s, err := OpenReadOnly(tt.path)
		if err == nil {
			s.Close()
		}
		if err == nil || tt.is != nil && !errors.Is(err, tt.is) || !strings.Contains(err.Error(), tt.says) {
			t.Errorf("%s: %v, want %v, ...%q...", filepath.Base(tt.path), err, tt.is, tt.says)
		}
		if !heldIn(t, tt.path).same(before) {
			t.Errorf("%s is not as it was", filepath.Base(tt.path))
		}
	}
	nowhere := filepath.Join(t.TempDir(), "nowhere.db")
	if _, err := OpenReadOnly(nowhere); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("no file: %v", err)
	}
	if _, err := os.Stat(nowhere); !errors.Is(err, fs.ErrNotExist) {
		t.Error("reading has made a file")
	}
}
