package main

import (
	"context"
	"html"
	"net/http"
	"net/http/httptest"
	"regexp"
	"strings"
	"testing"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/answer"
	"heatreeve/agent/page"
	"heatreeve/agent/site"
	"heatreeve/agent/view"
	"heatreeve/configs"
)

// archive is a history without an agent, for a page to be made of.
type archive struct {
	page.Source
	data string
}

func (a *archive) Snapshot() *view.Snapshot { return nil }
func (a *archive) Now() time.Time           { return keptFrom }
func (a *archive) Report(ctx context.Context, q answer.Query) (*answer.Report, error) {
	return agent.Inquire(ctx, a.data, q)
}

// reader is the page of a history.
func reader(t *testing.T, data string) func(path string) (status int, body string) {
	t.Helper()
	s, err := site.Parse(configs.DemoName, configs.Demo)
	if err != nil {
		t.Fatal(err)
	}
	p := page.New(&archive{data: data}, page.Options{Site: s, Version: "test", Safety: agent.Safety})
	return func(path string) (int, string) {
		w := httptest.NewRecorder()
		p.ServeHTTP(w, httptest.NewRequest(http.MethodGet, path, nil))
		return w.Code, w.Body.String()
	}
}

var (
	rowOfTable = regexp.MustCompile(`(?s)<tr.*?</tr>`)
	markOfRow  = regexp.MustCompile(`<[^>]*>`)
)

// tableRows are the rows of a page's tables, cells divided by blanks.
func tableRows(body string) (all []string) {
	for _, row := range rowOfTable.FindAllString(body, -1) {
		all = append(all, strings.Join(strings.Fields(html.UnescapeString(markOfRow.ReplaceAllString(row, " "))), " "))
	}
	return all
}

// The page's account of the days on which the clocks of Dublin are set is that of the history:
// twenty-five and twenty-three hours, each told once and with its offset.
func TestAccountOfDaysOnWhichClocksAreSet(t *testing.T) {
	for _, tt := range []struct {
		from      time.Time // local midnight of the day before
		day, next string
		head      string
		hours     []string
		whole     string
		n         int
	}{
		{keptFrom, "2026-10-25", "2026-10-26", "Sun 25 Oct 2026 (25 h)", []string{"00:00 +01:00", "01:00 +01:00", "01:00 +00:00", "02:00 +00:00"}, "24:55:00 0:00:00 0:05:00", 25},
		{time.Date(2027, 3, 27, 0, 0, 0, 0, time.UTC), "2027-03-28", "2027-03-29", "Sun 28 Mar 2027 (23 h)", []string{"00:00 +00:00", "02:00 +01:00", "03:00 +01:00"}, "22:55:00 0:00:00 0:05:00", 23},
	} {
		read := reader(t, keepSince(t, tt.from))
		_, body := read("/account?load=hot-water&by=hour&from=" + tt.day + "&to=" + tt.next)
		rows := tableRows(body)[2:]
		if rows[0] != tt.head || len(rows) != tt.n+2 || !strings.HasSuffix(rows[len(rows)-1], tt.whole) {
			t.Fatalf("%s by hour: %q", tt.day, rows)
		}
		for i, want := range tt.hours {
			if !strings.HasPrefix(rows[1+i], want+" 0.") {
				t.Errorf("%s: hour %d is %q, want %q", tt.day, i, rows[1+i], want)
			}
		}
		_, body = read("/account?load=hot-water&by=day&from=" + tt.day + "&to=" + tt.next)
		if row := tableRows(body)[2]; !strings.HasPrefix(row, tt.head) || !strings.HasSuffix(row, tt.whole) {
			t.Errorf("%s by day: %q", tt.day, row)
		}
	}
}

// The same as CSV is what the command line writes, and what may not be asked is told alike.
func TestAccountAsCSVIsThatOfTheCommandLine(t *testing.T) {
	data := keep(t)
	read := reader(t, data)
	for _, by := range []string{"hour", "day", "month"} {
		_, want, _ := report(t, "--data", data, "--from", "2026-10-24", "--to", "2026-10-27", "--by", by, "--format", "csv")
		if status, got := read("/account.csv?from=2026-10-24&to=2026-10-27&by=" + by); status != http.StatusOK || got != want || strings.Count(got, "\r\n") < 5 {
			t.Errorf("by %s: status %d, %d bytes, want %d", by, status, len(got), len(want))
		}
	}
	for query, status := range map[string]int{"from=2026-13": http.StatusBadRequest, "from=2026-10-24&load=boiler": http.StatusBadRequest, "from=2026-10-26&to=2026-10-25": http.StatusBadRequest, "from=2019&by=day": http.StatusBadRequest, "from=2019-01&to=2019-02": http.StatusNotFound} {
		var args []string
		for _, x := range strings.Split(query, "&") {
			name, value, _ := strings.Cut(x, "=")
			args = append(args, "--"+name, value)
		}
		_, _, errs := report(t, append([]string{"--data", data}, args...)...)
		got, body := read("/account?" + query)
		_, told, _ := strings.Cut(html.UnescapeString(body), `id="fault">`)
		told, _, _ = strings.Cut(told, "</p>")
		if got != status || told == "" || !strings.Contains(errs, told) {
			t.Errorf("%s: status %d %q, want %d as in %q", query, got, told, status, errs)
		}
	}
}
