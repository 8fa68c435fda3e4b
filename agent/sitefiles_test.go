package agent

import (
	"path/filepath"
	"testing"

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
