package agent

import (
	"bytes"
	"encoding/gob"
	"encoding/json"
	"errors"
	"net"
	"net/http"
	"net/http/httptest"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/design"
	"heatreeve/store"
)

// A file tells its site's zone where the agent that wrote it did.
func TestInquireOfAFile(t *testing.T) {
	dir := t.TempDir()
	db := keep(t, filepath.Join(dir, HistoryFile), store.Options{}, 1440, ramp, "ramp")
	save := func(zone string) {
		var b bytes.Buffer
		if err := gob.NewEncoder(&b).Encode(savedAccounts{Site: "Mill", Zone: zone, Judges: map[string]olderJudge{"ramp": {design.Holding}}}); err != nil {
			t.Fatal(err)
		}
		if err := db.Commit(store.Batch{Beats: []store.Beat{{Through: week.UnixNano() + 1440*minute}}, Checkpoint: b.Bytes()}); err != nil {
			t.Fatal(err)
		}
	}
	inquire := func(data string, q answer.Query) (*answer.Report, error) {
		t.Helper()
		if err := db.Close(); err != nil {
			t.Fatal(err)
		}
		r, err := Inquire(t.Context(), data, q)
		var again error
		if db, again = store.Open(filepath.Join(dir, HistoryFile), store.Options{}); again != nil {
			t.Fatal(again)
		}
		t.Cleanup(func() { db.Close() })
		return r, err
	}
	if _, err := inquire(dir, answer.Query{From: "2026-10-24"}); err == nil || !strings.HasPrefix(err.Error(), "zone is missing") {
		t.Errorf("a history without a state: %v", err)
	}
	save("")
	if _, err := inquire(dir, answer.Query{From: "2026-10-24"}); err == nil || !strings.HasPrefix(err.Error(), "zone is missing") {
		t.Errorf("a history that knows no zone: %v", err)
	}
	if r, err := inquire(dir, answer.Query{From: "2026-10-24", Zone: "Asia/Kolkata"}); err != nil || r.Zone != "Asia/Kolkata" {
		t.Errorf("with a zone: %+v, %v", r, err)
	}
	save("Europe/Dublin")
	if err := leaveAddress(dir, address{"127.0.0.1:1", "gone", ""}); err != nil { // by an agent that was killed
		t.Fatal(err)
	}
	copied := filepath.Join(t.TempDir(), "copy.db")
	text, err := os.ReadFile(filepath.Join(dir, HistoryFile))
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(copied, text, 0o600); err != nil {
		t.Fatal(err)
	}
	for _, data := range []string{dir, filepath.Join(dir, HistoryFile), copied} {
		r, err := inquire(data, answer.Query{From: "2026-10-24"})
		if err != nil || r.Site != "Mill" || r.Zone != "Europe/Dublin" || !near12(r.Loads[0].Total.Given, rampHeat(0, 1440)) {
			t.Errorf("%s: %+v, %v", data, r, err)
		}
	}
	_, err = Inquire(t.Context(), dir, answer.Query{From: "2026-10-24"}) // db is open
	if !errors.Is(err, store.ErrLocked) && (err == nil || !strings.Contains(err.Error(), "no answer at 127.0.0.1:1")) {
		t.Errorf("a history that is open elsewhere: %v", err)
	}
}

func TestInquireWithoutHistory(t *testing.T) {
	dir := t.TempDir()
	for data, want := range map[string]string{dir: "no history in", filepath.Join(dir, "nowhere"): "nowhere"} {
		if _, err := Inquire(t.Context(), data, answer.Query{From: "2026-10-24"}); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: %v, want ...%q...", data, err, want)
		}
	}
	if files, err := os.ReadDir(dir); err != nil || len(files) > 0 {
		t.Errorf("a report has left %v, %v", files, err)
	}
	db, err := store.Open(filepath.Join(dir, HistoryFile), store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	if err := db.Close(); err != nil {
		t.Fatal(err)
	}
	if _, err := Inquire(t.Context(), dir, answer.Query{From: "2026-10-24"}); err == nil || !strings.Contains(err.Error(), "no account yet") {
		t.Errorf("an empty history: %v", err)
	}
}

// What an agent answers reaches the one who asked: the report, what is wrong with the
// query, or that it is another agent.
func TestAskTheAgent(t *testing.T) {
	dir := t.TempDir()
	db := keep(t, filepath.Join(dir, HistoryFile), store.Options{}, 1440, ramp, "ramp")
	s := newReports(historyIn(t, db, "Europe/Dublin"))
	server, a := own(s)
	defer server.Close()
	if err := leaveAddress(dir, a); err != nil {
		t.Fatal(err)
	}
	q := answer.Query{From: "2026-10-24", By: "hour", Demand: 30 * time.Minute}
	got, err := Inquire(t.Context(), dir, q)
	if err != nil {
		t.Fatal(err)
	}
	want, err := s.history.report(t.Context(), q)
	if err != nil {
		t.Fatal(err)
	}
	if g, w := text(t, got), text(t, want); g != w {
		t.Errorf("asked:\n%s\nmade:\n%s", g, w)
	}
	var wrong *answer.QueryError
	if _, err := Inquire(t.Context(), dir, answer.Query{From: "never"}); !errors.As(err, &wrong) || !strings.HasPrefix(wrong.Text, `from "never" is no date`) {
		t.Errorf("a wrong query: %v", err)
	}
	if _, err := Inquire(t.Context(), dir, answer.Query{From: "2036-10-24"}); err == nil || errors.As(err, &wrong) || !strings.HasPrefix(err.Error(), "the history holds no record") {
		t.Errorf("nothing to report: %v", err)
	}
	if _, err := ask(t.Context(), address{a.hostPort, "other", a.key}, q); !errors.Is(err, errUnreachable) {
		t.Errorf("another run: %v", err)
	}
	other := httptest.NewServer(http.NotFoundHandler())
	defer other.Close()
	if _, err := ask(t.Context(), address{strings.TrimPrefix(other.URL, "http://"), a.run, a.key}, q); !errors.Is(err, errUnreachable) {
		t.Errorf("another program: %v", err)
	}
	for body, want := range map[string]string{"{": "its answer of 1 bytes", "": "its answer of 0 bytes"} {
		if _, err := understand[answer.Report](a, http.StatusOK, []byte(body)); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("answer %q: %v", body, err)
		}
	}
}

func text(t *testing.T, r *answer.Report) string {
	t.Helper()
	b, err := json.Marshal(r)
	if err != nil {
		t.Fatal(err)
	}
	return string(b)
}

func TestAddressOfTheAgent(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, addressFile)
	keep(t, filepath.Join(dir, HistoryFile), store.Options{}, 1, ramp, "ramp")
	if err := forgetAddress(dir); err != nil {
		t.Error(err)
	}
	want := address{"[::1]:9617", "X", "K"}
	if err := leaveAddress(dir, want); err != nil {
		t.Fatal(err)
	}
	if got, err := findAddress(dir); err != nil || got != want {
		t.Errorf("%+v, %v", got, err)
	}
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	for from, to := range map[string]string{
		"[::1]:9617": "192.0.2.7:80", "::1": "::", "::": "2001:db8::", ":9617": "", "X\n": "\n", "K\n": "\n", "\nK": "", "device": "machine", // documentation addresses: RFC 5737, RFC 3849
	} {
		if err := os.WriteFile(path, bytes.Replace(text, []byte(from), []byte(to), 1), 0o600); err != nil {
			t.Fatal(err)
		}
		if a, err := findAddress(dir); err == nil {
			t.Errorf("%q for %q: %+v", to, from, a)
		}
	}
	for _, wrong := range []string{"", "localhost:80\nX\n", strings.Repeat("x\n", 1000)} {
		if err := os.WriteFile(path, []byte(wrong), 0o600); err != nil {
			t.Fatal(err)
		}
		if a, err := findAddress(dir); err == nil {
			t.Errorf("in %.20q: %+v", wrong, a)
		}
	}
	if err := forgetAddress(dir); err != nil {
		t.Error(err)
	}
	if a, err := findAddress(dir); err == nil {
		t.Errorf("found %+v", a)
	}
	if err := leaveAddress(filepath.Join(dir, "nowhere"), want); err == nil {
		t.Error("an address was left nowhere")
	}
}

// Who has a copy of a folder gets what is in the copy, and not what the agent has since.
func TestCopyOfAFolderWithItsAddress(t *testing.T) {
	dir, copied := t.TempDir(), filepath.Join(t.TempDir(), "copy")
	db := keep(t, filepath.Join(dir, HistoryFile), store.Options{}, 1440, ramp, "ramp")
	h := historyIn(t, db, "Europe/Dublin")
	s := newReports(h)
	server, at := own(s)
	defer server.Close()
	if err := leaveAddress(dir, at); err != nil {
		t.Fatal(err)
	}
	if err := os.CopyFS(copied, os.DirFS(dir)); err != nil {
		t.Fatal(err)
	}
	asked := 0
	for _, data := range []string{dir, copied} {
		err := reach(data, func(address) error { asked++; return nil }, func(history) error { return nil })
		if data == dir && (err != nil || asked != 1) || data == copied && asked != 1 {
			t.Errorf("%s: asked %d times, %v", data, asked, err)
		}
	}
}

// What accepts and says nothing, or something else, is no agent, and the file is read soon.
func TestSilenceAtTheAddress(t *testing.T) {
	t.Parallel()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	begun := time.Now()
	_, err = ask(t.Context(), address{l.Addr().String(), "R", ""}, answer.Query{From: "2026-10-24"})
	if took := time.Since(begun); !errors.Is(err, errUnreachable) || took < headerTime || took > reportTime/2 {
		t.Errorf("silence for %v: %v", took, err)
	}
}

// An agent that is there has all the time that a report may take.
func TestReportThatTakesLonger(t *testing.T) {
	t.Parallel()
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, 60, ramp, "ramp")
	s := newReports(historyIn(t, db, "UTC"))
	s.turn.one <- struct{}{} // another report is in the making
	time.AfterFunc(headerTime+time.Second, func() { <-s.turn.one })
	server, at := own(s)
	defer server.Close()
	r, err := ask(t.Context(), at, answer.Query{From: "2026-10-23"})
	if err != nil || len(r.Loads) != 1 {
		t.Errorf("%+v, %v", r, err)
	}
}
