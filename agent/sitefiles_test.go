package agent

import (
	"crypto/sha256"
	"fmt"
	"path/filepath"
	"slices"
	"testing"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/store"
)

// The history keeps the site file that the accounts go by, and since when; a start with the
// same file writes nothing of it again, and one that another program has changed is read as
// it was.
func TestTheHistoryKeepsSiteFiles(t *testing.T) {
	path := filepath.Join(t.TempDir(), "history.db")
	until := int64(0)
	for i, text := range []string{benchSite, benchSite, benchSite + annex, benchSite} {
		l, shut := open(t, parsed(t, text), path, store.Options{})
		if l.batch.Site != nil {
			t.Errorf("start %d: the site file still waits", i)
		}
		feed(l, until, until+120)
		until += 120
		if err := l.commit(clock, true); err != nil {
			t.Fatal(err)
		}
		shut()
	}
	db, err := store.OpenReadOnly(path)
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	all, err := db.Sites()
	if err != nil || len(all) != 3 {
		t.Fatalf("%d site files, %v", len(all), err)
	}
	for i, want := range []struct {
		from int64
		text string
	}{{0, benchSite}, {clock.UnixNano() + 234*sec, benchSite + annex}, {clock.UnixNano() + 354*sec, benchSite}} {
		text, err := db.SiteText(all[i].Digest)
		if err != nil || all[i].From != want.from || string(text) != want.text || parsed(t, string(text)).Digest != all[i].Digest {
			t.Errorf("site file %d: from %d, %d bytes, %v; want from %d", i, all[i].From, len(text), err, want.from)
		}
	}
}

// A report names the site files that were in force in its time: the one that it begins with,
// and those that came before its end.
func TestAReportNamesSiteFilesInForce(t *testing.T) {
	db, err := store.Open(filepath.Join(t.TempDir(), "history.db"), store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	const day = 86400 * sec
	for i, text := range []string{"a", "b", "a"} {
		if err := db.Commit(store.Batch{Site: &store.SiteFile{From: int64(i) * 10 * day, Text: []byte(text)}}); err != nil {
			t.Fatal(err)
		}
	}
	digest := func(text string) string { return fmt.Sprintf("%x", sha256.Sum256([]byte(text))) }
	a, b := digest("a"), digest("b")
	for _, tt := range []struct {
		from, to, through int64
		want              []string
	}{
		{0, 30, 30, []string{a + "@0", b + "@10", a + "@20"}},
		{5, 15, 30, []string{a + "@0", b + "@10"}},
		{10, 20, 30, []string{b + "@10"}}, // the one before has ended, and the next begins with the end
		{12, 30, 15, []string{b + "@10"}}, // event time has come no further
		{25, 30, 30, []string{a + "@20"}},
	} {
		h, r := history{db: db}, answer.Report{}
		h.addSiteFiles(&r, account.Plan{From: tt.from * day, To: tt.to * day, Through: tt.through * day, Zone: time.UTC, By: account.Day})
		var got []string
		for _, f := range r.SiteFiles {
			got = append(got, fmt.Sprintf("%s@%d", f.SHA256, f.From.Unix()/86400))
		}
		if !slices.Equal(got, tt.want) || len(r.Notes) > 0 {
			t.Errorf("from day %d to %d: %v %v, want %v", tt.from, tt.to, got, r.Notes, tt.want)
		}
	}
}
