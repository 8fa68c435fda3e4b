package agent

import (
	"log/slog"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"heatreeve/store"
)

// Whatever page of its history is wiped, the accounts go on from what is salvaged: from the
// registers of the last commit or the one before, and never from more.
func TestLedgerAfterASalvage(t *testing.T) {
	s := parsed(t, benchSite)
	dir := t.TempDir()
	path := filepath.Join(dir, HistoryFile)
	l, shut := open(t, s, path, store.Options{})
	var totals []float64
	for at := int64(0); at < 1200; at += 30 {
		feed(l, at, at+30)
		if err := l.commit(clock, at%300 == 0); err != nil {
			t.Fatal(err)
		}
		totals = append(totals, l.registers()[0].Given)
	}
	shut()
	whole, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	last, size := totals[len(totals)-1], os.Getpagesize()
	exact, stateless := 0, 0
	for page := range min(len(whole)/size, 60) {
		b := append([]byte{}, whole...)
		clear(b[page*size : (page+1)*size])
		damaged, into := filepath.Join(dir, "damaged.db"), filepath.Join(t.TempDir(), "to.db")
		if err := os.WriteFile(damaged, b, 0o600); err != nil {
			t.Fatal(err)
		}
		r, err := store.Salvage(damaged, into)
		if err != nil {
			t.Fatal(err)
		}
		var log strings.Builder
		db, err := store.Open(into, store.Options{})
		if err != nil {
			t.Fatal(err)
		}
		l, err := openLedger(s, db, Options{Log: slog.New(slog.NewTextHandler(&log, nil))}, clock)
		if err != nil {
			t.Fatal(err)
		}
		if told := strings.Contains(log.String(), "no state of the accounts"); told != (r.Names && r.Registers && !r.State) {
			t.Errorf("page %d wiped: the log says %q of %+v", page, &log, r)
		}
		if events := ofKind(toldEvents(t, l), eventState); len(events) > 1 || (len(events) == 1) != strings.Contains(log.String(), "no state of the accounts") {
			t.Errorf("page %d wiped: events %q", page, events)
		}
		got := l.registers()[0].Given
		if r.Names && (r.Registers || r.State) && got != last && got != totals[len(totals)-2] || got > last {
			t.Errorf("page %d wiped: %g J, want %g; %+v", page, got, last, r)
		}
		if got == last {
			exact++
		}
		if !r.State {
			stateless++
		}
		feed(l, 1200, 1260)
		if err := l.commit(clock, false); err != nil {
			t.Errorf("page %d wiped: %v", page, err)
		}
		if err := db.Close(); err != nil {
			t.Errorf("page %d wiped: %v", page, err)
		}
	}
	if exact < 10 || stateless == 0 {
		t.Errorf("%d pages wiped left the registers, %d took the state", exact, stateless)
	}
}

// Whichever page was wiped, the salvaged history itself tells of it, where figures are missing
// and later; one with nothing lost says so.
func TestASalvagedHistoryTellsOfIt(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, HistoryFile)
	if err := keep(t, path, store.Options{}, 700, ramp, "hot-water").Close(); err != nil {
		t.Fatal(err)
	}
	whole, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	size, timed := os.Getpagesize(), 0
	for page := -1; page < len(whole)/size; page += 3 {
		b := append([]byte{}, whole...)
		if page >= 0 {
			clear(b[page*size : (page+1)*size])
		}
		damaged := filepath.Join(dir, "damaged.db")
		if err := os.WriteFile(damaged, b, 0o600); err != nil {
			t.Fatal(err)
		}
		s, err := Salvage(damaged, t.TempDir())
		if err != nil {
			t.Fatalf("page %d wiped: %v", page, err)
		}
		e := onlyEvent(t, s.Path)
		if want := "salvaged from "; e.Kind != eventDamage || !strings.HasPrefix(e.Text, want) || strings.Contains(e.Text, "nothing lost") != s.Whole || strings.Contains(e.Text, "saved: ") {
			t.Errorf("page %d wiped: %+v of %q", page, e, s.Lines)
		}
		if e.At < e.Until && e.At < week.UnixNano()+700*minute {
			timed++
		}
	}
	if timed == 0 {
		t.Error("no event tells of the time of a loss")
	}
}

func onlyEvent(t *testing.T, path string) store.Event {
	t.Helper()
	db, err := store.Open(path, store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	var all []store.Event
	for e, err := range db.Events(math.MinInt64, math.MaxInt64) {
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, e)
	}
	if len(all) != 1 {
		t.Fatalf("%d events, want 1: %+v", len(all), all)
	}
	return all[0]
}

// What has no time of its own, and what a damaged key tells, is not told as a date.
func TestSpansOfASalvage(t *testing.T) {
	const begin, hour = int64(1_800_000_000) * sec, 3600 * sec
	for _, tt := range []struct {
		from, to int64
		want     string
	}{
		{begin, begin + hour, ", from 2027-01-15 08:00:00 UTC to 2027-01-15 09:00:00 UTC"},
		{0, begin, ", up to 2027-01-15 08:00:00 UTC"},
		{begin, begin + 1e6*hour, ", from 2027-01-15 08:00:00 UTC on"},
		{begin + 1e6*hour, begin + 2e6*hour, ""},
	} {
		if got := between(store.Tally{Count: 1, From: tt.from, To: tt.to}, begin+2*hour); got != tt.want {
			t.Errorf("from %d to %d: %q, want %q", tt.from, tt.to, got, tt.want)
		}
	}
}
