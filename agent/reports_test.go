package agent

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"heatreeve/agent/answer"
	"io"
	"math"
	"net"
	"net/http"
	"net/http/httptest"
	"net/url"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"heatreeve/store"
)

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
		{"from=2027-01-01", 404, "the history holds no record of hot-water, glycol from 2027-01-01 00:00 +00:00 on; it goes up to"},
		{"from=2020-01-01&to=2021-01-01", 404, "it goes up to 2026-10-28 03:00 +00:00"},
	} {
		w := httptest.NewRecorder()
		s.ServeHTTP(w, httptest.NewRequest(http.MethodGet, reportPath+"?"+tt.query, nil))
		if w.Code != tt.status || !strings.Contains(said(w), tt.text) {
			t.Errorf("%s: %d %q, want %d ...%q...", tt.query, w.Code, w.Body, tt.status, tt.text)
		}
	}
}

// A history whose time has not begun says so, and names no day of 1970.
func TestReportBeforeTimeHasBegun(t *testing.T) {
	db, err := store.Open(filepath.Join(t.TempDir(), HistoryFile), store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	if _, err := db.IDs("load", []string{"hot-water"}); err != nil {
		t.Fatal(err)
	}
	w := httptest.NewRecorder()
	newReports(historyIn(t, db, "Europe/Dublin")).ServeHTTP(w, httptest.NewRequest(http.MethodGet, reportPath+"?from=2026-10-24", nil))
	if w.Code != http.StatusNotFound || !strings.Contains(said(w), "its time has not begun") || strings.Contains(said(w), "1970") {
		t.Errorf("%d %q", w.Code, w.Body)
	}
}

// Queries survive the way to the agent.
func TestQueryRoundTrip(t *testing.T) {
	for _, demand := range []time.Duration{0, answer.NoDemand, 20 * time.Minute} {
		checkRoundTrip(t, answer.Query{From: "2026-10-24", To: "2026-10-25T06:00+01:00", By: "hour", Loads: []string{"a b", "c&d=e"}, Demand: demand, Zone: "Asia/Kolkata"})
	}
}

func checkRoundTrip(t *testing.T, q answer.Query) {
	t.Helper()
	v, err := url.ParseQuery(q.Values().Encode())
	if err != nil {
		t.Fatal(err)
	}
	got, err := answer.QueryOf(v)
	if err != nil || got.From != q.From || got.To != q.To || got.By != q.By || got.Demand != q.Demand || got.Zone != q.Zone || !slices.Equal(got.Loads, q.Loads) {
		t.Errorf("%+v, %v; want %+v", got, err, q)
	}
}

// The answer is bounded, and the work for one that nobody waits for ends.
func TestReportIsBounded(t *testing.T) {
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, 60, ramp, "ramp")
	h := historyIn(t, db, "UTC")
	h.through = func() int64 { return week.Add(3 * 365 * 24 * time.Hour).UnixNano() }
	_, err := h.report(t.Context(), answer.Query{From: "2026-10-01", By: "hour"})
	var wrong *answer.QueryError
	if !errors.As(err, &wrong) || !strings.Contains(err.Error(), "by hour there are more than 12000 periods") {
		t.Errorf("three years by the hour: %v", err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := h.report(ctx, answer.Query{From: "2026-10-01"}); !errors.Is(err, context.Canceled) {
		t.Errorf("a report that nobody waits for: %v", err)
	}
	s := newReports(h)
	s.turn.one <- struct{}{} // another one is in the making
	if w := asked(ctx, s); w.Code != http.StatusServiceUnavailable || !strings.Contains(said(w), "took all the time") {
		t.Errorf("a report that waits for its turn in vain: %d %s", w.Code, w.Body)
	}
	for range atATime {
		s.turn.all <- struct{}{}
	}
	if w := asked(t.Context(), s); w.Code != http.StatusServiceUnavailable || !strings.Contains(said(w), "in the making") {
		t.Errorf("a report too many: %d %s", w.Code, w.Body)
	}
}

func asked(ctx context.Context, s *reports) *httptest.ResponseRecorder {
	w := httptest.NewRecorder()
	s.ServeHTTP(w, httptest.NewRequestWithContext(ctx, http.MethodGet, reportPath+"?from=2026-10-01", nil))
	return w
}

// Clients that ask and take nothing hold one report at a time, and that not for long.
func TestReportsThatNobodyTakes(t *testing.T) {
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, 200*1440, ramp, "ramp")
	s := newReports(historyIn(t, db, "UTC"))
	s.stall = 200 * time.Millisecond
	served := make(chan struct{}, 40)
	server := httptest.NewServer(http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		s.ServeHTTP(w, r)
		served <- struct{}{}
	}))
	defer server.Close()
	const clients = 40
	for range clients {
		c, err := net.Dial("tcp", server.Listener.Addr().String())
		if err != nil {
			t.Fatal(err)
		}
		defer c.Close()
		if err := c.(*net.TCPConn).SetReadBuffer(4096); err != nil {
			t.Fatal(err)
		}
		fmt.Fprintf(c, "GET %s?from=2026-10-24&by=hour HTTP/1.1\r\nHost: x\r\n\r\n", reportPath)
	}
	for range clients {
		<-served
	}
	s.stall = reportStall
	resp, err := http.Get(server.URL + reportPath + "?from=2026-10-24&by=hour")
	if err != nil {
		t.Fatal(err)
	}
	defer resp.Body.Close()
	var r answer.Report
	if err := json.NewDecoder(resp.Body).Decode(&r); err != nil || resp.StatusCode != http.StatusOK || len(r.Loads[0].Periods) < 4500 {
		t.Errorf("one that takes its report: %d, %v", resp.StatusCode, err)
	}
}

// A month by the hour from a year of history; ms-least is the quickest of the reports.
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
		answer.Query
	}{
		{"30d-by-hour", answer.Query{From: "2027-06-01", To: "2027-07-01", By: "hour", Loads: []string{"a"}}},
		{"30d-by-hour-demand", answer.Query{From: "2027-06-01", To: "2027-07-01", By: "hour", Loads: []string{"a"}, Demand: 15 * time.Minute}},
		{"year-by-month", answer.Query{From: "2026-10-24", By: "month", Loads: []string{"a"}}},
	} {
		b.Run(q.name, func(b *testing.B) {
			least := time.Duration(math.MaxInt64)
			for b.Loop() {
				begun := time.Now()
				r, err := h.report(b.Context(), q.Query)
				if err != nil {
					b.Fatal(err)
				}
				if err := json.NewEncoder(io.Discard).Encode(r); err != nil {
					b.Fatal(err)
				}
				least = min(least, time.Since(begun))
			}
			b.ReportMetric(float64(least.Microseconds())/1e3, "ms-least")
		})
	}
}
