package agent

import (
	"bytes"
	"context"
	"encoding/gob"
	"encoding/json"
	"errors"
	"io"
	"math"
	"net/http"
	"net/http/httptest"
	"net/url"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"heatreeve/store"
)

// week is the beginning of the histories in these tests: the day before clocks go back
// in Dublin.
var week = time.Date(2026, 10, 23, 23, 0, 0, 0, time.UTC)

// keep writes a history at path: n minutes of each load from week on, as f has them, or
// none where it says so.
func keep(t *testing.T, path string, o store.Options, n int, f func(load string, k int) (store.Minute, bool), loads ...string) *store.Store {
	t.Helper()
	db, err := store.Open(path, o)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { db.Close() })
	ids, err := db.IDs("load", loads)
	if err != nil {
		t.Fatal(err)
	}
	b := store.Batch{Beats: []store.Beat{{Through: week.UnixNano() + int64(n)*minute}}}
	for k := range n {
		for i, load := range loads {
			if m, ok := f(load, k); ok {
				m.Load, m.Start = ids[i], week.UnixNano()+int64(k)*minute
				b.Minutes = append(b.Minutes, m)
			}
		}
	}
	if err := db.Commit(b); err != nil {
		t.Fatal(err)
	}
	return db
}

// ramp is a minute of a duty that rises by 100 W each minute, measured but for two
// seconds of it.
func ramp(_ string, k int) (store.Minute, bool) {
	duty := 100 * float64(k)
	return store.Minute{Measured: 58, Missing: 2, Given: 58 * duty, Duty: duty, DutyMin: duty - 5, DutyMax: duty + 5, DutyUncertainty: duty / 100}, true
}

// rampHeat is the heat of the ramp's minutes from a up to b.
func rampHeat(a, b int) float64 { return 58 * 100 * float64(b*(b-1)-a*(a-1)) / 2 }

func historyIn(t *testing.T, db *store.Store, zone string, current ...string) history {
	t.Helper()
	place, err := time.LoadLocation(zone)
	if err != nil {
		t.Fatal(err)
	}
	through, err := eventTime(db)
	if err != nil {
		t.Fatal(err)
	}
	return history{db: db, zone: place, through: through.UnixNano, current: current}
}

func near12(a, b float64) bool { return math.Abs(a-b) <= 1e-12*math.Abs(b) }

// Whatever records serve, hours or minutes, the heat is that of the ramp, and the time
// adds up; by the clocks of places that are off UTC by full hours and by half ones, with
// windows and without, from a full hour and from the middle of one.
func TestReportOfARamp(t *testing.T) {
	const n = 3 * 1440
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, n, ramp, "ramp")
	for _, zone := range []string{"Europe/Dublin", "America/St_Johns", "Asia/Kolkata", "UTC"} {
		for _, by := range []string{"hour", "day", "month"} {
			for _, demand := range []time.Duration{0, 15 * time.Minute, time.Hour} {
				for _, span := range [][2]int{{0, n}, {60, 1500}, {80, 1999}, {3, 17}} {
					h := historyIn(t, db, zone)
					q := Query{By: by, Demand: demand,
						From: week.Add(time.Duration(span[0]) * time.Minute).Format(time.RFC3339),
						To:   week.Add(time.Duration(span[1]) * time.Minute).Format(time.RFC3339)}
					checkRamp(t, &h, q, span[0], span[1])
				}
			}
		}
	}
}

func checkRamp(t *testing.T, h *history, q Query, from, to int) {
	t.Helper()
	r, err := h.report(t.Context(), q)
	if err != nil || len(r.Loads) != 1 || len(r.Notes) > 0 {
		t.Fatalf("%+v: %v, %+v", q, err, r)
	}
	l := r.Loads[0]
	minutes := float64(to - from)
	if want := rampHeat(from, to); !near12(l.Total.Given, want) || !near12(l.Total.Uncertainty, want/100) || l.Total.Measured != 58*minutes || l.Total.Missing != 2*minutes {
		t.Errorf("%+v: total %+v, want %g J", q, l.Total, want)
	}
	if l.Begins != nil && from > 0 {
		t.Errorf("%+v: begins %v", q, l.Begins)
	}
	if l.Total.Highest.Duty != 100*float64(to-1)+5 || l.Total.Lowest.Duty != 100*float64(from)-5 {
		t.Errorf("%+v: from %+v to %+v", q, l.Total.Lowest, l.Total.Highest)
	}
	var given, missing float64
	end := r.From
	for _, p := range l.Periods {
		a, b := int(p.AccountedFrom.Sub(week)/time.Minute), int(p.AccountedTo.Sub(week)/time.Minute)
		if !near12(p.Given, rampHeat(a, b)) || !p.AccountedFrom.Equal(end) || p.Measured+p.Missing != p.AccountedTo.Sub(p.AccountedFrom).Seconds() {
			t.Fatalf("%+v: %+v, want %g J", q, p, rampHeat(a, b))
		}
		given, missing, end = given+p.Given, missing+p.Missing, p.AccountedTo
	}
	if !near12(given, l.Total.Given) || missing != l.Total.Missing || !end.Equal(r.To) {
		t.Errorf("%+v: periods up to %v with %g J and %g s missing, total %+v", q, end, given, missing, l.Total)
	}
	if d := l.Total.Demand; (d != nil) != (q.Demand != 0) || d != nil && d.Peak != nil && !near12(d.Peak.Duty,
		rampHeat(int(d.Peak.Start.Sub(week)/time.Minute), int(d.Peak.End.Sub(week)/time.Minute))/q.Demand.Seconds()) {
		t.Errorf("%+v: demand %+v", q, d)
	}
}

// Where minutes have been given up for their age, their hours are still in the account;
// what cannot be told any more is.
func TestReportOfHoursWithoutMinutes(t *testing.T) {
	const n = 3 * 1440
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{MaxAge: 24 * time.Hour}, n, ramp, "ramp")
	if _, err := db.Trim(week.Add(n * time.Minute).UnixNano()); err != nil {
		t.Fatal(err)
	}
	ids, err := db.Names("load")
	if err != nil {
		t.Fatal(err)
	}
	for range db.Minutes(ids["ramp"], week.UnixNano(), week.Add(24*time.Hour).UnixNano()) {
		t.Fatal("the minutes of the first day are still there")
	}
	h := historyIn(t, db, "Europe/Dublin")
	checkRamp(t, &h, Query{From: "2026-10-24", To: "2026-10-26"}, 0, 49*60)
	r, err := h.report(t.Context(), Query{From: "2026-10-24", To: "2026-10-25", Demand: 15 * time.Minute})
	if err != nil {
		t.Fatal(err)
	}
	if l := r.Loads[0]; !near12(l.Total.Given, rampHeat(0, 1440)) || l.Total.Demand.Peak != nil || l.Total.Demand.Windows != 96 ||
		len(r.Notes) != 1 || !strings.Contains(r.Notes[0], "ramp: of 24 hours not all minutes are left") {
		t.Errorf("total %+v, notes %q", l.Total, r.Notes)
	}
	h = historyIn(t, db, "Asia/Kolkata") // midnight is in the middle of such an hour
	if r, err = h.report(t.Context(), Query{From: "2026-10-24T06:00", To: "2026-10-26"}); err != nil {
		t.Fatal(err)
	}
	if len(r.Notes) != 1 || !strings.Contains(r.Notes[0], "ramp: 3 records cannot be used and are missing") {
		t.Errorf("notes %q; want the hours that lie in two days, or are cut by the ends of the report", r.Notes)
	}
}

// A load that begins within the report shows so; one that is not accounted for any more is
// told of only where it has a record, or is asked for.
func TestReportOfLoadsThatComeAndGo(t *testing.T) {
	const n = 2 * 1440
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, n, func(load string, k int) (store.Minute, bool) {
		m, _ := ramp(load, k)
		return m, load == "old" && k < 600 || load == "new" && k >= 1690 || load == "blind" && k < 30
	}, "old", "new", "blind")
	h := historyIn(t, db, "Europe/Dublin", "new", "blind")
	names := func(r *Report) (all []string) {
		for _, l := range r.Loads {
			all = append(all, l.Load)
		}
		return all
	}
	for _, tt := range []struct {
		q    Query
		want []string
	}{
		{Query{From: "2026-10-24"}, []string{"old", "new", "blind"}},
		{Query{From: "2026-10-25"}, []string{"new", "blind"}},
		{Query{From: "2026-10-24", To: "2026-10-25"}, []string{"old", "blind"}},
		{Query{From: "2026-10-25", Loads: []string{"old"}}, []string{"old"}},
	} {
		r, err := h.report(t.Context(), tt.q)
		if err != nil || !slices.Equal(names(r), tt.want) {
			t.Errorf("%+v: %v, %v; want %v", tt.q, names(r), err, tt.want)
		}
	}
	r, err := h.report(t.Context(), Query{From: "2026-10", By: "hour", Loads: []string{"new"}})
	if err != nil {
		t.Fatal(err)
	}
	l := r.Loads[0]
	begins := week.Add(1690 * time.Minute)
	if l.Begins == nil || !l.Begins.Equal(begins) || !l.Periods[0].Start.Equal(begins.Truncate(time.Hour)) || !near12(l.Total.Given, rampHeat(1690, n)) {
		t.Errorf("begins %v, first period %v, total %+v", l.Begins, l.Periods[0].Start, l.Total)
	}
	if all := r.To.Sub(r.From).Seconds(); l.Total.Measured+l.Total.Missing != all {
		t.Errorf("%g s measured and %g s missing of %g s", l.Total.Measured, l.Total.Missing, all)
	}
}

func TestRegistersBesideTheSum(t *testing.T) {
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, 600, ramp, "ramp")
	ids, err := db.Names("load")
	if err != nil {
		t.Fatal(err)
	}
	if err := db.Commit(store.Batch{Registers: []store.Register{{Load: ids["ramp"], Given: 5e9, Taken: 7, Measured: 11, Missing: 13}}}); err != nil {
		t.Fatal(err)
	}
	h := historyIn(t, db, "UTC")
	for _, tt := range []struct {
		to   string
		want *Register
	}{{"", &Register{5e9, 7, 11, 13}}, {"2027-01-01", &Register{5e9, 7, 11, 13}}, {"2026-10-24T05:00", nil}} {
		r, err := h.report(t.Context(), Query{From: "2026-10-24", To: tt.to})
		if err != nil {
			t.Fatal(err)
		}
		if got := r.Loads[0].Register; (got == nil) != (tt.want == nil) || got != nil && *got != *tt.want {
			t.Errorf("to %q: register %+v, want %+v", tt.to, got, tt.want)
		}
	}
}

// What the agent's page says to a query: the same as a report made from the file, or
// what is wrong.
func TestReportPage(t *testing.T) {
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, 6000, ramp, "hot-water", "glycol")
	s := newReports(historyIn(t, db, "Europe/Dublin"))
	for _, tt := range []struct {
		query  string
		status int
		text   string
	}{
		{"from=2026-10-24&by=hour&load=glycol&demand=15m", 200, `"load":"glycol"`},
		{"from=2026-10-24&zone=Asia/Kolkata", 200, `"from":"2026-10-24T00:00:00+05:30"`},
		{"", 400, "from is missing"},
		{"from=yesterday", 400, `from "yesterday" is no date; write 2026-12-31`},
		{"from=2026-10-24&to=2026-10-25T01:30", 400, `to "2026-10-25T01:30" comes twice`},
		{"from=2026-10-24&to=2026-10-24", 400, "to 2026-10-24 is not after from 2026-10-24; it is the end"},
		{"from=2026-10-24&from=2026-10-25", 400, "from is given 2 times"},
		{"from=2026-10-24&by=week", 400, `by "week": allowed are hour, day, month`},
		{"from=2026-10-24&demand=7m", 400, "demand 7m0s: allowed are 5m"},
		{"from=2026-10-24&demand=quarter", 400, `demand "quarter" is no length of time`},
		{"from=2026-10-24&zone=Dublin", 400, `zone "Dublin" is not known`},
		{"from=2026-10-24&zone=Local", 400, `zone "Local"`},
		{"from=2026-10-24&zone=../../etc/passwd", 400, "is not known"},
		{"from=2026-10-24&load=hotwater", 400, `load "hotwater" is not in the history; did you mean "hot-water"?`},
		{"from=2026-10-24&load=steam", 400, `there are: hot-water, glycol`},
		{"from=2026-10-24&format=csv", 400, "format is no parameter; known: from, to, by"},
		{"from=2027-01-01", 404, "the history holds no record of hot-water, glycol from 2027-01-01 00:00 +00:00"},
		{"from=2020-01-01&to=2021-01-01", 404, "it goes up to 2026-10-28 03:00 +00:00"},
	} {
		w := httptest.NewRecorder()
		s.ServeHTTP(w, httptest.NewRequest(http.MethodGet, reportPath+"?"+tt.query, nil))
		if w.Code != tt.status || !strings.Contains(w.Body.String(), tt.text) {
			t.Errorf("%s: %d %q, want %d ...%q...", tt.query, w.Code, w.Body, tt.status, tt.text)
		}
	}
}

// Queries survive the way to the agent.
func TestQueryRoundTrip(t *testing.T) {
	q := Query{From: "2026-10-24", To: "2026-10-25T06:00+01:00", By: "hour", Loads: []string{"a b", "c&d=e"}, Demand: 90 * time.Minute, Zone: "Asia/Kolkata"}
	v, err := url.ParseQuery(q.values().Encode())
	if err != nil {
		t.Fatal(err)
	}
	got, err := queryOf(v)
	if err != nil || got.From != q.From || got.To != q.To || got.By != q.By || got.Demand != q.Demand || got.Zone != q.Zone || !slices.Equal(got.Loads, q.Loads) {
		t.Errorf("%+v, %v; want %+v", got, err, q)
	}
}

// The answer is bounded, and the work for one that nobody waits for ends.
func TestReportIsBounded(t *testing.T) {
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, 60, ramp, "ramp")
	h := historyIn(t, db, "UTC")
	h.through = func() int64 { return week.Add(3 * 365 * 24 * time.Hour).UnixNano() }
	_, err := h.report(t.Context(), Query{From: "2026-10-01", By: "hour"})
	var wrong *QueryError
	if !errors.As(err, &wrong) || !strings.Contains(err.Error(), "by hour there are more than 12000 periods") {
		t.Errorf("three years by the hour: %v", err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := h.report(ctx, Query{From: "2026-10-01"}); !errors.Is(err, context.Canceled) {
		t.Errorf("a report that nobody waits for: %v", err)
	}
	s := newReports(h)
	s.turn <- struct{}{} // another one is in the making
	if _, err := s.answer(ctx, Query{From: "2026-10-01"}); !errors.Is(err, context.Canceled) {
		t.Errorf("a report that waits for its turn in vain: %v", err)
	}
}

// A file tells its site's zone where the agent that wrote it did.
func TestInquireOfAFile(t *testing.T) {
	dir := t.TempDir()
	db := keep(t, filepath.Join(dir, HistoryFile), store.Options{}, 1440, ramp, "ramp")
	save := func(zone string) {
		var b bytes.Buffer
		if err := gob.NewEncoder(&b).Encode(savedAccounts{Site: "Mill", Zone: zone, Judges: map[string]savedJudge{"ramp": {}}}); err != nil {
			t.Fatal(err)
		}
		if err := db.Commit(store.Batch{Beats: []store.Beat{{Through: week.UnixNano() + 1440*minute}}, Checkpoint: b.Bytes()}); err != nil {
			t.Fatal(err)
		}
	}
	inquire := func(data string, q Query) (*Report, error) {
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
	if _, err := inquire(dir, Query{From: "2026-10-24"}); err == nil || !strings.HasPrefix(err.Error(), "zone is missing") {
		t.Errorf("a history without a state: %v", err)
	}
	save("")
	if _, err := inquire(dir, Query{From: "2026-10-24"}); err == nil || !strings.HasPrefix(err.Error(), "zone is missing") {
		t.Errorf("a history that knows no zone: %v", err)
	}
	if r, err := inquire(dir, Query{From: "2026-10-24", Zone: "Asia/Kolkata"}); err != nil || r.Zone != "Asia/Kolkata" {
		t.Errorf("with a zone: %+v, %v", r, err)
	}
	save("Europe/Dublin")
	if err := leaveAddress(dir, address{"127.0.0.1:1", "gone"}); err != nil { // by an agent that was killed
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
		r, err := inquire(data, Query{From: "2026-10-24"})
		if err != nil || r.Site != "Mill" || r.Zone != "Europe/Dublin" || !near12(r.Loads[0].Total.Given, rampHeat(0, 1440)) {
			t.Errorf("%s: %+v, %v", data, r, err)
		}
	}
	_, err = Inquire(t.Context(), dir, Query{From: "2026-10-24"}) // db is open
	if !errors.Is(err, store.ErrLocked) && (err == nil || !strings.Contains(err.Error(), "no answer at 127.0.0.1:1")) {
		t.Errorf("a history that is open elsewhere: %v", err)
	}
}

func TestInquireWithoutHistory(t *testing.T) {
	dir := t.TempDir()
	for data, want := range map[string]string{dir: "no history in", filepath.Join(dir, "nowhere"): "nowhere"} {
		if _, err := Inquire(t.Context(), data, Query{From: "2026-10-24"}); err == nil || !strings.Contains(err.Error(), want) {
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
	if _, err := Inquire(t.Context(), dir, Query{From: "2026-10-24"}); err == nil || !strings.Contains(err.Error(), "no account yet") {
		t.Errorf("an empty history: %v", err)
	}
}

// What an agent answers reaches the one who asked: the report, what is wrong with the
// query, or that it is another agent.
func TestAskTheAgent(t *testing.T) {
	dir := t.TempDir()
	db := keep(t, filepath.Join(dir, HistoryFile), store.Options{}, 1440, ramp, "ramp")
	s := newReports(historyIn(t, db, "Europe/Dublin"))
	server := httptest.NewServer(s)
	defer server.Close()
	a := address{strings.TrimPrefix(server.URL, "http://"), s.run}
	if err := leaveAddress(dir, a); err != nil {
		t.Fatal(err)
	}
	q := Query{From: "2026-10-24", By: "hour", Demand: 30 * time.Minute}
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
	var wrong *QueryError
	if _, err := Inquire(t.Context(), dir, Query{From: "never"}); !errors.As(err, &wrong) || !strings.HasPrefix(wrong.Text, `from "never" is no date`) {
		t.Errorf("a wrong query: %v", err)
	}
	if _, err := Inquire(t.Context(), dir, Query{From: "2036-10-24"}); err == nil || errors.As(err, &wrong) || !strings.HasPrefix(err.Error(), "the history holds no record") {
		t.Errorf("nothing to report: %v", err)
	}
	if _, err := ask(t.Context(), address{a.hostPort, "other"}, q); !errors.Is(err, errUnreachable) {
		t.Errorf("another run: %v", err)
	}
	other := httptest.NewServer(http.NotFoundHandler())
	defer other.Close()
	if _, err := ask(t.Context(), address{strings.TrimPrefix(other.URL, "http://"), s.run}, q); !errors.Is(err, errUnreachable) {
		t.Errorf("another program: %v", err)
	}
	for body, want := range map[string]string{"{": "its answer of 1 bytes", "": "its answer of 0 bytes"} {
		if _, err := understand(a, http.StatusOK, []byte(body)); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("answer %q: %v", body, err)
		}
	}
}

func text(t *testing.T, r *Report) string {
	t.Helper()
	b, err := json.Marshal(r)
	if err != nil {
		t.Fatal(err)
	}
	return string(b)
}

func TestAddressOfTheAgent(t *testing.T) {
	dir := t.TempDir()
	if err := forgetAddress(dir); err != nil {
		t.Error(err)
	}
	want := address{"[::]:9617", "X"}
	if err := leaveAddress(dir, want); err != nil {
		t.Fatal(err)
	}
	if got, ok := findAddress(dir); !ok || got != want {
		t.Errorf("%+v, %v", got, ok)
	}
	if err := forgetAddress(dir); err != nil {
		t.Error(err)
	}
	if a, ok := findAddress(dir); ok {
		t.Errorf("found %+v", a)
	}
	if err := os.WriteFile(filepath.Join(dir, addressFile), nil, 0o600); err != nil {
		t.Fatal(err)
	}
	if a, ok := findAddress(dir); ok {
		t.Errorf("in an empty file %+v", a)
	}
	if err := leaveAddress(filepath.Join(dir, "nowhere"), want); err == nil {
		t.Error("an address was left nowhere")
	}
}

// A month by the hour from a year of history.
func BenchmarkReport(b *testing.B) {
	dir := b.TempDir()
	db, err := store.Open(filepath.Join(dir, HistoryFile), store.Options{})
	if err != nil {
		b.Fatal(err)
	}
	defer db.Close()
	ids, err := db.IDs("load", []string{"a", "b", "c", "d", "e", "f", "g", "h"})
	if err != nil {
		b.Fatal(err)
	}
	const year = 365 * 1440
	for k := 0; k < year; {
		batch := store.Batch{Beats: []store.Beat{{Through: week.UnixNano() + int64(k+1440)*minute}}}
		for ; k < year && len(batch.Minutes) < 1440*len(ids); k++ {
			for _, id := range ids {
				m, _ := ramp("", k%5000)
				m.Load, m.Start = id, week.UnixNano()+int64(k)*minute
				batch.Minutes = append(batch.Minutes, m)
			}
		}
		if err := db.Commit(batch); err != nil {
			b.Fatal(err)
		}
	}
	h := history{db: db, zone: time.UTC, through: week.Add(year * time.Minute).UnixNano}
	for _, q := range []struct {
		name string
		Query
	}{
		{"30d-by-hour", Query{From: "2027-06-01", To: "2027-07-01", By: "hour", Loads: []string{"a"}}},
		{"30d-by-hour-demand", Query{From: "2027-06-01", To: "2027-07-01", By: "hour", Loads: []string{"a"}, Demand: 15 * time.Minute}},
		{"year-by-month", Query{From: "2026-10-24", By: "month", Loads: []string{"a"}}},
	} {
		b.Run(q.name, func(b *testing.B) {
			for b.Loop() {
				r, err := h.report(b.Context(), q.Query)
				if err != nil {
					b.Fatal(err)
				}
				if err := json.NewEncoder(io.Discard).Encode(r); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
