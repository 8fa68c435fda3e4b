package store

import (
	"crypto/sha256"
	"errors"
	"fmt"
	"path/filepath"
	"strings"
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"
)

func site(from int64, text string) Batch {
	return Batch{Site: &SiteFile{From: from, Text: []byte(text)}}
}

// inForce lists when which text begins.
func inForce(t *testing.T, s *Store) string {
	t.Helper()
	all, err := s.Sites()
	if err != nil {
		t.Fatal(err)
	}
	var list []string
	for _, f := range all {
		text, err := s.SiteText(f.Digest)
		if err != nil || sha256.Sum256(text) != f.Digest {
			t.Fatalf("%d: %q, %v", f.From, text, err)
		}
		list = append(list, fmt.Sprintf("%d %s", f.From, text))
	}
	return strings.Join(list, ", ")
}

// texts counts what there is of texts.
func texts(t *testing.T, s *Store) (n int) {
	t.Helper()
	err := s.view(func(tx *bolt.Tx) error {
		return sites(tx).ForEach(func(k, _ []byte) error {
			if len(k) == sha256.Size {
				n++
			}
			return nil
		})
	})
	if err != nil {
		t.Fatal(err)
	}
	return n
}

// A site file is kept when it changes, one text once, and time never runs back.
func TestSitesAreKeptOnce(t *testing.T) {
	path := filepath.Join(t.TempDir(), "history.db")
	s := openStore(t, path, Options{})
	if all, err := s.Sites(); err != nil || len(all) != 0 {
		t.Fatalf("a new history has %v, %v", all, err)
	}
	if text, err := s.SiteText([32]byte{}); err != nil || text != nil {
		t.Fatalf("a new history has a text %q, %v", text, err)
	}
	for _, b := range []Batch{site(0, "a"), site(5, "a"), site(10, "b"), site(20, "a"), site(20, "c"), site(7, "d"), site(30, "d")} {
		commit(t, s, b)
	}
	const want = "0 a, 10 b, 20 a, 21 c, 22 d"
	if got := inForce(t, s); got != want || texts(t, s) != 4 {
		t.Errorf("in force %s, of %d texts; want %s, of 4", got, texts(t, s), want)
	}
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
	r, err := OpenReadOnly(path)
	if err != nil {
		t.Fatal(err)
	}
	if got := inForce(t, r); got != want {
		t.Errorf("read only: %s", got)
	}
	if err := r.Close(); err != nil {
		t.Fatal(err)
	}
	if err := openStore(t, path, Options{}).Commit(Batch{Site: &SiteFile{Text: make([]byte, mostSiteText+1)}}); err == nil {
		t.Error("a text without bound is kept")
	}
}

// What is no longer in force goes by age and last of all by room; what is stays.
func TestTrimSites(t *testing.T) {
	s := newStore(t, Options{MaxHourAge: time.Hour})
	for i, text := range []string{"a", "b", "a", "c"} {
		commit(t, s, site(int64(i)*1000*second, text))
	}
	for _, tt := range []struct {
		now  int64
		gone int64
		left string
	}{
		{4599, 0, "0 a, 1000000000000 b, 2000000000000 a, 3000000000000 c"},
		{4600, 1, "1000000000000 b, 2000000000000 a, 3000000000000 c"},
		{5600, 1, "2000000000000 a, 3000000000000 c"},
		{99999, 1, "3000000000000 c"},
	} {
		if got, err := s.Trim(tt.now * second); err != nil || got != (Trimmed{Sites: tt.gone}) || inForce(t, s) != tt.left {
			t.Errorf("at %d s: %+v, %v, left %s", tt.now, got, err, inForce(t, s))
		}
	}
	if n := texts(t, s); n != 1 {
		t.Errorf("%d texts are left", n)
	}
}

// For want of room the site files go after all else, and the one in force never.
func TestTrimSitesForRoom(t *testing.T) {
	s := newStore(t, Options{MaxBytes: 1})
	commit(t, s, site(0, "a"))
	commit(t, s, site(1, "b"))
	commit(t, s, Batch{Beats: plant(0, 3600, 4), Checkpoint: []byte{1}})
	got, err := s.Trim(0)
	if err != nil || got.Sites != 1 || inForce(t, s) != "1 b" {
		t.Errorf("%+v, %v: left %s", got, err, inForce(t, s))
	}
}

// A damaged text, or its time, is told, and does not keep the next from being written.
func TestDamagedSites(t *testing.T) {
	for _, ofText := range []bool{false, true} {
		path := filepath.Join(t.TempDir(), "history.db")
		s := openStore(t, path, Options{})
		commit(t, s, site(0, "a"))
		commit(t, s, site(5, "b"))
		if err := s.Close(); err != nil {
			t.Fatal(err)
		}
		sum := sha256.Sum256([]byte("b"))
		key := siteKey(5)
		if ofText {
			key = sum[:]
		}
		editFile(t, path, func(tx *bolt.Tx) error {
			v := append([]byte{}, sites(tx).Get(key)...)
			v[2] ^= 1
			return sites(tx).Put(key, v)
		})
		s = openStore(t, path, Options{})
		all, err := s.Sites()
		_, bad := s.SiteText(sum)
		if ofText && (err != nil || len(all) != 2 || !errors.Is(bad, ErrDamaged)) || !ofText && (!errors.Is(err, ErrDamaged) || len(all) != 1 || bad != nil) {
			t.Errorf("text damaged %v: %d, %v, %v", ofText, len(all), err, bad)
		}
		commit(t, s, site(7, "b"))
		if text, err := s.SiteText(sum); err != nil || string(text) != "b" {
			t.Errorf("written again: %q, %v", text, err)
		}
	}
}
