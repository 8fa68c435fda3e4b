package store

import (
	"errors"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"
	"unicode/utf8"

	bolt "go.etcd.io/bbolt"
)

func eventsStore(t *testing.T, o Options) *Store {
	t.Helper()
	return openStore(t, filepath.Join(t.TempDir(), "history.db"), o)
}

// TestEventBounds cuts texts that are too long, at the end of a character.
func TestEventBounds(t *testing.T) {
	s := eventsStore(t, Options{})
	long := strings.Repeat("é", 5000)
	commit(t, s, Batch{Events: []Event{{At: 1, Number: 1, Kind: long, Subject: "x" + long, Text: "\xff" + long}}})
	got := drain(t, s.Events(0, 2))
	if len(got) != 1 {
		t.Fatalf("%d events", len(got))
	}
	e := got[0]
	for _, text := range []struct {
		got  string
		most int
	}{{e.Kind, mostKind}, {e.Subject, mostSubject}, {e.Text, mostText}} {
		if n := len(text.got); n > text.most || n < text.most-1 || !utf8.ValidString(text.got) {
			t.Errorf("%d bytes of %d, valid %v", n, text.most, utf8.ValidString(text.got))
		}
	}
}

// TestEventsInPieces reads more events than one transaction looks at.
func TestEventsInPieces(t *testing.T) {
	s := eventsStore(t, Options{})
	const n = 3*eventsAView + 5
	var b Batch
	for i := range int64(n) {
		b.Events = append(b.Events, Event{At: i - n, Until: i - n, Number: uint64(i)})
	}
	commit(t, s, b)
	for _, span := range [][2]int64{{-n, 0}, {-eventsAView - 1, -eventsAView + 1}, {-eventsAView, -eventsAView}, {-1, math.MaxInt64}} {
		got := drain(t, s.Events(span[0], span[1]))
		if want := min(span[1], 0) - span[0]; int64(len(got)) != want || want > 0 && got[0].At != span[0] {
			t.Errorf("%v: %d events, want %d", span, len(got), want)
		}
	}
	for range s.Events(-n, 0) {
		break
	}
}

// TestTrimEvents removes events by age, by number and by room.
func TestTrimEvents(t *testing.T) {
	s := eventsStore(t, Options{MaxHourAge: time.Hour})
	var b Batch
	for i := range int64(5000) {
		b.Events = append(b.Events, Event{At: i * second, Until: i * second, Number: uint64(i + 1), Text: strings.Repeat("x", 200)})
	}
	commit(t, s, b)
	trimmed := func(now, gone, first int64) {
		t.Helper()
		got, err := s.Trim(now)
		left := drain(t, s.Events(math.MinInt64, math.MaxInt64))
		if err != nil || got.Events < gone || got != (Trimmed{Events: got.Events}) || len(left) == 0 || left[0].At < first*second {
			t.Fatalf("Trim: %+v, %v; %d left", got, err, len(left))
		}
	}
	trimmed(3700*second, 100, 100)
	if left := drain(t, s.Events(math.MinInt64, math.MaxInt64)); len(left) != 4900 {
		t.Fatalf("%d events are left", len(left))
	}
	s.mostEvents = 4000
	trimmed(3700*second, 900, 1000)
	if left := drain(t, s.Events(math.MinInt64, math.MaxInt64)); len(left) != 4000 {
		t.Fatalf("%d events are left", len(left))
	}
	s.maxBytes = s.Bytes() - 200_000
	trimmed(3700*second, 500, 1500)
	if s.Bytes() > s.maxBytes {
		t.Errorf("%d bytes in use, want %d", s.Bytes(), s.maxBytes)
	}
	if next, err := s.NextEvent(); err != nil || next != 5001 {
		t.Errorf("NextEvent() = %d, %v", next, err)
	}
}

// TestTrimOrder gives up minutes before events, and events before hours.
func TestTrimOrder(t *testing.T) {
	s := eventsStore(t, Options{})
	for n := range uint64(damageNumbers) {
		commit(t, s, numbered(n+1))
	}
	events := len(drain(t, s.Events(0, math.MaxInt64)))
	s.maxBytes = s.Bytes() - 40_000 // less than the readings and minutes take
	if got, err := s.Trim(0); err != nil || got.Readings+got.Minutes == 0 || got.Events != 0 {
		t.Fatalf("%+v, %v", got, err)
	}
	s.maxBytes = 1
	got, err := s.Trim(0)
	if err != nil || got.Minutes == 0 || got.Events != int64(events) || got.Hours == 0 {
		t.Fatalf("%+v, %v; there were %d events", got, err, events)
	}
}

// TestDamagedEvent tells of an event that cannot be read, and goes on.
func TestDamagedEvent(t *testing.T) {
	s := eventsStore(t, Options{})
	commit(t, s, Batch{Events: []Event{{At: 1, Number: 1, Text: "one"}, {At: 2, Number: 2, Text: "two"}, {At: 3, Number: 3, Text: "three"}}})
	err := s.db.Update(func(tx *bolt.Tx) error {
		b, key := tx.Bucket(bucketEvents), eventKey(2, 2)
		v := slices.Clone(b.Get(key))
		v[len(v)/2] ^= 1
		return b.Put(key, v)
	})
	if err != nil {
		t.Fatal(err)
	}
	var texts []string
	faults := 0
	for e, err := range s.Events(0, 10) {
		if err != nil {
			if faults++; !errors.Is(err, ErrDamaged) {
				t.Error(err)
			}
			continue
		}
		texts = append(texts, e.Text)
	}
	if faults != 1 || !slices.Equal(texts, []string{"one", "three"}) {
		t.Errorf("%d faults, events %q", faults, texts)
	}
	s.mostEvents = 1
	if got, err := s.Trim(0); err != nil || got != (Trimmed{Events: 1, Damaged: 1}) || s.Damaged() != 1 {
		t.Errorf("%+v, %v, %d damaged", got, err, s.Damaged())
	}
}

// TestEventsAfterUpgrade writes events to a file of the first layout.
func TestEventsAfterUpgrade(t *testing.T) {
	path := layout1(t)
	s := openStore(t, path, Options{})
	if next, err := s.NextEvent(); err != nil || next != 1 {
		t.Fatalf("NextEvent() = %d, %v", next, err)
	}
	e := Event{At: 5, Until: 6, Number: 1, Kind: "test"}
	commit(t, s, Batch{Events: []Event{e}})
	if got := drain(t, s.Events(0, 10)); !slices.Equal(got, []Event{e}) {
		t.Errorf("%+v", got)
	}
}

// TestRootPage keeps the root's page one page, with tails and registers as large as bbolt
// lays into it.
func TestRootPage(t *testing.T) {
	s := eventsStore(t, Options{})
	page := s.db.Info().PageSize
	for n := range uint64(400) {
		b := numbered(n + 1)
		b.Registers = b.Registers[:0]
		for load := range uint32((page/4 - 80) / 60) {
			b.Registers = append(b.Registers, Register{Load: load + 1})
		}
		commit(t, s, b)
		err := s.db.View(func(tx *bolt.Tx) error {
			// A leaf of its own is what a root is as long as it is not split.
			root, err := tx.Page(int(tx.Cursor().Bucket().RootPage()))
			if err == nil && (root.Type != "leaf" || root.OverflowCount != 0) {
				t.Fatalf("after batch %d the root is a %s with %d pages more", n+1, root.Type, root.OverflowCount)
			}
			return err
		})
		if err != nil {
			t.Fatal(err)
		}
	}
}
