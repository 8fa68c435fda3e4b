package agent

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"

	"heatreeve/agent/answer"
	"heatreeve/agent/site"
	"heatreeve/store"
)

// toldEvents returns the events on disk, each as its kind and text.
func toldEvents(t *testing.T, l *ledger) (all []string) {
	t.Helper()
	for e, err := range l.store.Events(math.MinInt64, math.MaxInt64) {
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, e.Kind+": "+e.Text)
	}
	return all
}

func ofKind(all []string, kind string) []string {
	return slices.DeleteFunc(slices.Clone(all), func(s string) bool { return !strings.HasPrefix(s, kind+": ") })
}

// openAt is open with a clock.
func openAt(t *testing.T, s *site.Site, path string, now func() time.Time) (*ledger, func()) {
	t.Helper()
	db, err := store.Open(path, store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	l, err := openLedger(s, db, Options{Log: slog.New(slog.DiscardHandler), Version: "1.0", Now: now}, clock)
	if err != nil {
		t.Fatal(err)
	}
	return l, func() {
		if err := db.Close(); err != nil {
			t.Error(err)
		}
	}
}

// A start and another site file are told once each, however often the process is killed
// after them.
func TestStartsAndSiteFilesAreTold(t *testing.T) {
	path := filepath.Join(t.TempDir(), "h.db")
	before := parsed(t, benchSite)
	after := parsed(t, strings.Replace(benchSite, "0.5 % of reading", "1 % of reading", 1))
	for i, s := range []*site.Site{before, before, after, after} {
		l, kill := open(t, s, path, store.Options{}) // nothing is committed after that
		all := toldEvents(t, l)
		if got := ofKind(all, eventStarted); len(got) != i+1 || !strings.Contains(got[i], shortDigest(s.Digest)) {
			t.Errorf("start %d: %q", i+1, got)
		}
		want := fmt.Sprintf("%s: the site file changed from %s to %s; what waited for a decision is missing", eventRules, shortDigest(before.Digest), shortDigest(after.Digest))
		if got := ofKind(all, eventRules); i < 2 && len(got) > 0 || i >= 2 && !slices.Equal(got, []string{want}) {
			t.Errorf("start %d: %q", i+1, got)
		}
		feed(l, int64(i)*100, int64(i)*100+100)
		l.happened(eventClock, "is lost with the process")
		kill()
	}
}

// A disk that takes nothing is one event, from the first commit that failed to the one that
// did not, with what was given up; and is told once where a commit was said to have failed
// and has not.
func TestOutageIsOneEvent(t *testing.T) {
	now := clock
	l, shut := openAt(t, parsed(t, benchSite), filepath.Join(t.TempDir(), "h.db"), func() time.Time { return now })
	defer shut()
	full := errors.New("no room")
	write := l.write
	l.write = func(store.Batch) error { return full }
	begun := now
	for range 5 {
		l.happened(eventClock, "meanwhile")
		if err := l.commit(now, false); err == nil {
			t.Fatal("the commit did not fail")
		}
		now = now.Add(time.Minute)
	}
	l.batch.Minutes = make([]store.Minute, maxMinutes+3)
	l.bound()
	l.batch.Minutes = nil
	l.write = func(b store.Batch) error { return errors.Join(write(b), full) }
	if err := l.commit(now, false); err == nil {
		t.Fatal("the commit did not fail")
	}
	l.write = write
	now = now.Add(time.Minute)
	for range 2 {
		if err := l.commit(now, false); err != nil {
			t.Fatal(err)
		}
	}
	all := toldEvents(t, l)
	if got := ofKind(all, eventClock); len(got) != 5 {
		t.Errorf("%d events of the outage's time, want 5", len(got))
	}
	if got := ofKind(all, eventLost); len(got) != 1 || !strings.Contains(got[0], " 0 readings") || !strings.Contains(got[0], " 3 minutes") {
		t.Errorf("%q", got)
	}
	if got := ofKind(all, eventDisk); len(got) != 1 || !strings.HasSuffix(got[0], "no room") {
		t.Errorf("%q", got)
	}
	for e, err := range l.store.Events(0, math.MaxInt64) {
		if err != nil || e.Kind == eventDisk && (e.At != begun.UnixNano() || e.Until != now.UnixNano()) {
			t.Errorf("%+v, %v; want from %v to %v", e, err, begun, now)
		}
	}
}

// A commit that fails and succeeds at once, as in a full history, is not told.
func TestShortOutageIsNotTold(t *testing.T) {
	l, shut := open(t, parsed(t, benchSite), filepath.Join(t.TempDir(), "h.db"), store.Options{})
	defer shut()
	write := l.write
	l.write = func(store.Batch) error { return errors.New("no room") }
	if err := l.commit(clock, false); err == nil {
		t.Fatal("the commit did not fail")
	}
	l.write = write
	if err := l.commit(clock, false); err != nil {
		t.Fatal(err)
	}
	if got := toldEvents(t, l); len(got) != 1 {
		t.Errorf("%q", got)
	}
}

// Events are bounded as long as the disk takes nothing; how many are given up is told.
func TestWaitingEventsAreBounded(t *testing.T) {
	l, shut := open(t, parsed(t, benchSite), filepath.Join(t.TempDir(), "h.db"), store.Options{})
	defer shut()
	write := l.write
	l.write = func(store.Batch) error { return errors.New("no room") }
	if err := l.commit(clock, false); err == nil {
		t.Fatal("the commit did not fail")
	}
	for range mostWaiting + 7 {
		l.happened(eventClock, "again")
	}
	l.write = write
	if err := l.commit(clock, false); err != nil {
		t.Fatal(err)
	}
	all := toldEvents(t, l)
	if got := ofKind(all, eventLost); len(got) != 1 || !strings.HasSuffix(got[0], "and 7 events") || len(ofKind(all, eventClock)) != mostWaiting {
		t.Errorf("%d events, %q", len(all), got)
	}
}

// Damage of the history that a commit met is told by the next.
func TestDamageIsTold(t *testing.T) {
	path := filepath.Join(t.TempDir(), "h.db")
	s := parsed(t, benchSite)
	l, shut := open(t, s, path, store.Options{})
	feed(l, 0, 200)
	if err := l.commit(clock, true); err != nil {
		t.Fatal(err)
	}
	shut()
	db, err := bolt.Open(path, 0o600, nil)
	if err != nil {
		t.Fatal(err)
	}
	err = db.Update(func(tx *bolt.Tx) error { return tx.Bucket([]byte("meta")).Put([]byte("hours"), []byte("damaged")) })
	if err := errors.Join(err, db.Close()); err != nil {
		t.Fatal(err)
	}
	l, shut = open(t, s, path, store.Options{})
	defer shut()
	for range 3 {
		if err := l.commit(clock, false); err != nil {
			t.Fatal(err)
		}
	}
	if got := ofKind(toldEvents(t, l), eventDamage); len(got) != 1 || !strings.Contains(got[0], "1 damaged record") {
		t.Errorf("%q", got)
	}
}

// A report has the events of its time, and those since where it goes as far as the history.
func TestReportHasEvents(t *testing.T) {
	now := clock
	l, shut := openAt(t, parsed(t, benchSite), filepath.Join(t.TempDir(), "h.db"), func() time.Time { return now })
	defer shut()
	feed(l, 0, 3*3600)
	now = clock.Add(2 * time.Hour)
	l.happened(eventClock, "by an hour")
	now = clock.Add(4 * time.Hour)
	l.happened(eventStopped, "later")
	if err := l.commit(now, true); err != nil {
		t.Fatal(err)
	}
	h := history{db: l.store, zone: time.UTC, through: l.through.Load, current: []string{"circuit"}}
	at := func(d time.Duration) string { return clock.Add(d).UTC().Format("2006-01-02T15:04Z") }
	for _, tt := range []struct {
		from, to string
		want     []string
	}{
		{at(-time.Hour), "", []string{eventStarted, eventClock, eventStopped}},
		{at(time.Hour), "", []string{eventClock, eventStopped}},
		{at(-time.Hour), at(time.Hour), []string{eventStarted}},
	} {
		r, err := h.report(context.Background(), answer.Query{From: tt.from, To: tt.to, By: "hour"})
		if err != nil {
			t.Fatal(err)
		}
		var got []string
		for _, e := range r.Events {
			if got = append(got, e.Kind); e.Until == nil || !e.Until.Equal(e.At) {
				t.Errorf("%+v took some time", e)
			}
		}
		if !slices.Equal(got, tt.want) {
			t.Errorf("from %s to %s: %q, want %q", tt.from, tt.to, got, tt.want)
		}
	}
}

// A clock that was set, and is followed, is told once, with by how much.
func TestSetClockIsTold(t *testing.T) {
	m := newMachine()
	s := parsed(t, benchSite)
	intakes, err := newIntakes(s, Options{Log: slog.New(slog.DiscardHandler)}, nil)
	if err != nil {
		t.Fatal(err)
	}
	a := &Agent{site: s, clock: m.stepless, intakes: intakes, o: Options{Now: m.Now, Log: slog.New(slog.DiscardHandler)}}
	l, shut := openAt(t, s, filepath.Join(t.TempDir(), "h.db"), m.Now)
	defer shut()
	r := a.newRhythm(l, m.Now())
	m.pass(settling)
	m.offset = time.Hour
	for range 400 {
		m.pass(time.Second)
		a.put(r)
	}
	if err := l.commit(clock, true); err != nil {
		t.Fatal(err)
	}
	if got := ofKind(toldEvents(t, l), eventClock); len(got) != 1 || !strings.Contains(got[0], "set by 1h0m0s") {
		t.Errorf("%q", got)
	}
}
