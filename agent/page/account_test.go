package page

import (
	"context"
	"fmt"
	"net/http"
	"net/http/httptest"
	"net/url"
	"slices"
	"strings"
	"sync/atomic"
	"testing"
	"testing/synctest"
	"time"

	"golang.org/x/net/html"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
)

func dublin(t *testing.T) *time.Location {
	t.Helper()
	zone, err := time.LoadLocation("Europe/Dublin")
	if err != nil {
		t.Fatal(err)
	}
	return zone
}

// even is a period of 500 kW, with so many seconds missing.
func even(start, end time.Time, missing float64) answer.PeriodReport {
	mean, u := 500e3, 4e3
	whole := end.Sub(start).Seconds()
	heat := mean * (whole - missing)
	return answer.PeriodReport{
		Start: start, End: end, AccountedFrom: start, AccountedTo: end, Given: heat, Expanded: 0.016 * heat,
		Measured: whole - missing, Missing: missing, Coverage: 1 - missing/whole, Mean: &mean, MeanU: &u,
		Lowest: &answer.Extreme{}, Highest: &answer.Extreme{Duty: 620e3, Start: start.Add(20 * time.Minute)},
	}
}

// twoDays is a report over the two days on which the clocks of Dublin are set.
func twoDays(t *testing.T) *answer.Report {
	t.Helper()
	zone := dublin(t)
	day := func(y int, m time.Month, d int) (time.Time, time.Time) {
		return time.Date(y, m, d, 0, 0, 0, 0, zone), time.Date(y, m, d+1, 0, 0, 0, 0, zone)
	}
	period := func(start, end time.Time, missing float64) answer.PeriodReport {
		p := even(start, end, missing)
		p.Demand = &answer.Demand{Peak: &answer.Peak{Duty: 560e3, Start: start.Add(2 * time.Hour), Coverage: 1 - missing/1e4}}
		p.Witness = &answer.Witness{Counted: 1.01 * p.Given, Served: 0.998 * p.Given, Deviation: -0.012}
		return p
	}
	long, next := day(2026, 10, 25)
	short, end := day(2027, 3, 28)
	second := period(short, end, 3661)
	second.Bridged, second.BridgedGiven, second.Latent, second.Uncertain = 600, 3e8, 7300, 61
	return &answer.Report{
		Site: "Mill", Zone: "Europe/Dublin", By: "day", From: long, To: end, Accounted: end, Factor: 2, Demand: 900,
		SiteFiles: []answer.SiteFile{{From: time.Unix(0, 0), SHA256: strings.Repeat("ab", 32)}, {From: short, SHA256: strings.Repeat("cd", 32)}},
		Loads: []answer.LoadReport{{
			Load: `<b>"hall"</b>`, Periods: []answer.PeriodReport{period(long, next, 0), second}, Total: period(long, end, 3661),
			Register: &answer.Register{Given: 8.64e12, Measured: 1.728e7, Missing: 5},
		}},
		Notes: []string{"hall: of 2 hours not all minutes are left"}, Unused: 3,
		Events: []answer.Event{{At: long, Kind: "started", Text: "heatreeve 1"}},
	}
}

// rowsOf are the texts of a table's cells.
func rowsOf(table *html.Node) (all []string) {
	for _, tr := range elements(table, "tr") {
		var cells []string
		for _, c := range elements(tr, "") {
			if c.Data == "td" || c.Data == "th" {
				cells = append(cells, text(c))
			}
		}
		all = append(all, strings.Join(cells, " | "))
	}
	return all
}

// The account has heat, uncertainty, duty, peak and the three times of each period, with the
// length of a day that has not 24 hours, in the units asked for, and what limits its use.
func TestAccountIsTold(t *testing.T) {
	p, source := mill(t, cooler())
	report := twoDays(t)
	var asked answer.Query
	source.report = func(q answer.Query) (*answer.Report, error) {
		asked = q
		return report, nil
	}
	w := get(p, "/account?from=2026-10-25&to=2027-03-29&by=day&load=&heat=GJ&duty=MW")
	page := parsed(t, w.Body.String())
	tables := elements(page, "table")
	rows := strings.Join(rowsOf(tables[0]), "\n")
	for _, want := range []string{
		"Period | Given GJ | Taken GJ | ± GJ | Mean duty MW | ± MW | Peak of 15 min MW | at | Coverage | Measured h:mm:ss | Bridged h:mm:ss | Missing h:mm:ss",
		"Sun 25 Oct 2026 (25 h) +01:00 | 45.00 | 0 | 0.72 | 0.5000 | 0.0080 | 0.5600 | 01:00 +00:00 | 100.0 % | 25:00:00 | 0:00:00 | 0:00:00",
		"Sun 28 Mar 2027 (23 h) +00:00 | 39.57 | 0 | 0.63 | 0.5000 | 0.0080 | 0.5600 | 03:00 +01:00 (63 %) | 95.5 % | 21:58:59 | 0:10:00 | 1:01:01",
		" | bridged besides: given 0.30, taken 0 GJ", " | latent, sensible part only: 2:01:40", " | by an uncertain reading: 0:01:01", "Total | ",
	} {
		if !strings.Contains(rows, want) {
			t.Errorf("%q is not in\n%s", want, rows)
		}
	}
	if got, want := rowsOf(tables[1])[2], "Sun 25 Oct 2026 (25 h) +01:00 | 45.45 | 44.91 | -1.2 | 1.6"; got != want {
		t.Errorf("witness %q, want %q", got, want)
	}
	tells(t, page, "abababababababab since the beginning", "cdcdcdcdcdcdcdcd since Sun 28 Mar 2027 00:00 +00:00", "Clock of Europe/Dublin", "coverage factor 2, about 95 %",
		"No safety function.", "by Heatreeve test", "not all minutes are left", "3 records of the history cannot be used", "greatest mean of 15 minutes",
		"Tue 1 Dec 2026 12:00 +00:00", "given 8640, taken 0 GJ", "measured 4800:00:00, bridged 0:00:00, missing 0:00:05", "/account?by=day&duty=MW&from=2026-10-25&heat=GJ&to=2027-03-29")
	if got, want := rowsOf(tables[2])[1], "Sun 25 Oct 2026 00:00 +01:00 | still | started | – | heatreeve 1"; got != want {
		t.Errorf("events %q, want %q", got, want)
	}
	if strings.Contains(w.Body.String(), `<b>"hall"`) {
		t.Error("the name of a load is markup")
	}
	if asked.From != "2026-10-25" || asked.To != "2027-03-29" || asked.By != "day" || len(asked.Loads) != 0 {
		t.Errorf("asked for %+v", asked)
	}
}

// Hours are told by the clock, each with its offset: when it is set back, one comes twice, and
// when it is set forward, one is passed over.
func TestHoursOfDaysOnWhichClocksAreSet(t *testing.T) {
	zone := dublin(t)
	for _, tt := range []struct {
		day   time.Time
		head  string
		hours []string
		n     int
	}{
		{time.Date(2026, 10, 25, 0, 0, 0, 0, zone), "Sun 25 Oct 2026 (25 h)", []string{"00:00 +01:00", "01:00 +01:00", "01:00 +00:00", "02:00 +00:00"}, 25},
		{time.Date(2027, 3, 28, 0, 0, 0, 0, zone), "Sun 28 Mar 2027 (23 h)", []string{"00:00 +00:00", "02:00 +01:00", "03:00 +01:00"}, 23},
	} {
		from, to := account.Day.Bounds(tt.day.UnixNano(), zone)
		l := answer.LoadReport{Load: "hall", Total: even(tt.day, time.Unix(0, to).In(zone), 0)}
		for at := from; at < to; {
			start, end := account.Hour.Bounds(at, zone)
			l.Periods = append(l.Periods, even(time.Unix(0, start).In(zone), time.Unix(0, end).In(zone), 0))
			at = end
		}
		p, source := mill(t, cooler())
		source.report = func(answer.Query) (*answer.Report, error) {
			return &answer.Report{By: "hour", Zone: "Europe/Dublin", From: tt.day, To: l.Total.End, Accounted: l.Total.End, Loads: []answer.LoadReport{l}}, nil
		}
		page := parsed(t, get(p, "/account?by=hour&from="+tt.day.Format("2006-01-02")).Body.String())
		rows := rowsOf(elements(page, "table")[0])[2:]
		if rows[0] != tt.head || len(rows) != tt.n+2 {
			t.Errorf("%d rows below %q, want %d below %q", len(rows)-2, rows[0], tt.n, tt.head)
		}
		for i, want := range tt.hours {
			if !strings.HasPrefix(rows[1+i], want+" | ") {
				t.Errorf("hour %d is %q, want %q", i, rows[1+i], want)
			}
		}
		if want := fmt.Sprintf("%d:00:00 | 0:00:00 | 0:00:00", tt.n); !strings.HasPrefix(rows[len(rows)-1], "Total | ") || !strings.HasSuffix(rows[len(rows)-1], want) {
			t.Errorf("total %q, want %q", rows[len(rows)-1], want)
		}
	}
}

// The CSV is that of the command line.
func TestAccountAsCSV(t *testing.T) {
	p, source := mill(t, cooler())
	report := twoDays(t)
	source.report = func(answer.Query) (*answer.Report, error) { return report, nil }
	var want strings.Builder
	if err := report.CSV(&want, false); err != nil {
		t.Fatal(err)
	}
	w := get(p, "/account.csv?from=2026-10-25&to=2027-03-29&by=day&heat=GJ")
	if w.Body.String() != want.String() || !strings.Contains(w.Header().Get("Content-Disposition"), `"account-2026-10-25.csv"`) || !strings.HasPrefix(w.Header().Get("Content-Type"), "text/csv") {
		t.Errorf("%v\n%s", w.Header(), w.Body)
	}
}

// fieldsOf are what a form sends.
func fieldsOf(page *html.Node) url.Values {
	v := url.Values{}
	for _, x := range elements(elements(page, "form")[0], "") {
		switch {
		case x.Data == "input":
			v.Add(attribute(x, "name"), attribute(x, "value"))
		case x.Data == "select":
			for _, o := range elements(x, "option") {
				for _, a := range o.Attr {
					if a.Key == "selected" {
						v.Set(attribute(x, "name"), text(o))
					}
				}
			}
		}
	}
	return v
}

// Without parameters it is this month by the clock of the site; what is wrong is told beside
// the form, with a status that says so.
func TestAccountOfWhat(t *testing.T) {
	for _, tt := range []struct {
		query  string
		err    error
		status int
		form   string
	}{
		{"", nil, http.StatusOK, "by=day&from=2026-12-01&to="},
		{"?from=&to=&load=&by=month", nil, http.StatusOK, "by=month&from=2026-12-01&to="},
		{"?from=2026-10-25T01:00%2B01:00&to=2026-11&load=cooler&zone=UTC&demand=5m&heat=GJ", nil, http.StatusOK, "by=day&demand=5m0s&from=2026-10-25T01%3A00%2B01%3A00&heat=GJ&load=cooler&to=2026-11-01&zone=UTC"},
		{"?load=cooler&load=old", nil, http.StatusOK, "by=day&from=2026-12-01&load=cooler&load=old&to="},
		{"?load=old", nil, http.StatusOK, "by=day&from=2026-12-01&load=old&to="},
		{"", fmt.Errorf("%w of hall", answer.ErrNoRecord), http.StatusOK, "by=day&from=2026-12-01&to="},
		{"?from=2026-13", answer.Wrongf("from %q is no date", "2026-13"), http.StatusBadRequest, "by=day&from=2026-13&to="},
		{"?from=2020-01", fmt.Errorf("%w of hall", answer.ErrNoRecord), http.StatusNotFound, "by=day&from=2020-01-01&to="},
		{"?from=2020-01-01", errNothing, http.StatusInternalServerError, "by=day&from=2020-01-01&to="},
		{"?duty=furlong", nil, http.StatusBadRequest, "by=day&from=2026-12-01&to="},
	} {
		p, source := mill(t, cooler())
		source.report = func(answer.Query) (*answer.Report, error) { return twoDays(t), tt.err }
		w := get(p, "/account"+tt.query)
		page := parsed(t, w.Body.String())
		if w.Code != tt.status || fieldsOf(page).Encode() != tt.form {
			t.Errorf("%s: %d with the form %s, want %d with %s", tt.query, w.Code, fieldsOf(page).Encode(), tt.status, tt.form)
		}
		if tt.err != nil {
			tells(t, page, tt.err.Error())
		}
		if got := get(p, "/account.csv"+tt.query).Code; tt.err != nil && got != statusOf(tt.err) {
			t.Errorf("%s as csv: %d", tt.query, got)
		}
	}
}

// Who has to wait too long is told when to ask again.
func TestAccountThatTakesTooLong(t *testing.T) {
	p, source := mill(t, cooler())
	source.report = func(answer.Query) (*answer.Report, error) {
		return nil, fmt.Errorf("read hours: %w", context.DeadlineExceeded)
	}
	w := get(p, "/account?from=2020")
	if w.Code != http.StatusServiceUnavailable || w.Header().Get("Retry-After") == "" {
		t.Errorf("status %d, %v", w.Code, w.Header())
	}
	tells(t, parsed(t, w.Body.String()), "ask for a shorter time, or again in a while")
}

// Many loads are told by the month, unless it is said how.
func TestAccountOfManyLoads(t *testing.T) {
	p, source := mill(t, cooler())
	for range manyLoads {
		p.Site.Loads = append(p.Site.Loads, p.Site.Loads[0])
	}
	for query, want := range map[string]string{"": "month", "?by=day": "day", "?load=cooler": "day"} {
		source.report = func(q answer.Query) (*answer.Report, error) {
			if q.By != want {
				t.Errorf("%q: by %s, want %s", query, q.By, want)
			}
			return twoDays(t), nil
		}
		get(p, "/account"+query)
	}
}

// The ways to usual times keep the load and the units.
func TestWaysToUsualTimes(t *testing.T) {
	p, source := mill(t, cooler())
	source.report = func(answer.Query) (*answer.Report, error) { return twoDays(t), nil }
	var got []string
	for _, nav := range elements(parsed(t, get(p, "/account?load=cooler&heat=GJ").Body.String()), "nav") {
		for _, a := range elements(nav, "a") {
			if attribute(nav, "aria-label") == "Usual times" {
				got = append(got, strings.TrimPrefix(attribute(a, "href"), "/account?"))
			}
		}
	}
	want := []string{
		"by=hour&from=2026-12-01&heat=GJ&load=cooler", "by=hour&from=2026-11-30&heat=GJ&load=cooler&to=2026-12-01", "by=day&from=2026-12-01&heat=GJ&load=cooler",
		"by=day&from=2026-11-01&heat=GJ&load=cooler&to=2026-12-01", "by=month&from=2026-01-01&heat=GJ&load=cooler",
	}
	if !slices.Equal(got, want) {
		t.Errorf("%q, want %q", got, want)
	}
}

// A parameter that is none is told, and nothing is asked of the history.
func TestAccountOfUnknownParameters(t *testing.T) {
	for query, want := range map[string]string{
		"form=2026-10":              "form is no parameter; known: from, to, by, load, demand, zone",
		"from=2026-10&from=2026-11": "from is given 2 times",
		"demand=7m":                 "demand 7m0s: allowed are",
	} {
		p, source := mill(t, cooler())
		source.report = func(q answer.Query) (*answer.Report, error) {
			t.Errorf("%s: asked for %+v", query, q)
			return nil, errNothing
		}
		w := get(p, "/account?"+query)
		if w.Code != http.StatusBadRequest {
			t.Errorf("%s: status %d", query, w.Code)
		}
		tells(t, byID(t, parsed(t, w.Body.String()), "fault"), want)
		if w := get(p, "/account.csv?"+query); w.Code != http.StatusBadRequest || !strings.Contains(w.Body.String(), want) {
			t.Errorf("%s as csv: %d %s", query, w.Code, w.Body)
		}
	}
}

// Where nothing is asked for, a history that is younger than the month is told from its first
// day on, and in the first minutes of a month the one before.
func TestAccountOfAYoungHistory(t *testing.T) {
	p, source := mill(t, cooler())
	var asked []string
	begins := noon.AddDate(0, 0, 3)
	source.report = func(q answer.Query) (*answer.Report, error) {
		asked = append(asked, q.From)
		r := twoDays(t)
		r.From, r.Loads[0].Begins = time.Date(2026, 12, 1, 0, 0, 0, 0, time.UTC), &begins
		return r, nil
	}
	page := parsed(t, get(p, "/account").Body.String())
	if got := strings.Join(asked, " "); got != "2026-12 2026-12-04" || fieldsOf(page).Get("from") != "2026-12-04" {
		t.Errorf("asked from %s, the form has %s", got, fieldsOf(page).Get("from"))
	}
	tells(t, page, "Its first record is of Fri 4 Dec 2026 12:00 +00:00")
	asked = nil
	get(p, "/account?from=2026-12")
	if got := strings.Join(asked, " "); got != "2026-12" {
		t.Errorf("asked from %s where the address says from when", got)
	}
	asked = nil
	source.report = func(q answer.Query) (*answer.Report, error) {
		if asked = append(asked, q.From); len(asked) == 1 {
			return nil, answer.ErrNoRecord
		}
		return twoDays(t), nil
	}
	if page := parsed(t, get(p, "/account").Body.String()); strings.Join(asked, " ") != "2026-12 2026-11" || fieldsOf(page).Get("from") != "2026-11-01" {
		t.Errorf("asked from %s", asked)
	}
}

// A period that is not accounted for throughout says which part its figures are for.
func TestAccountOfPartOfAPeriod(t *testing.T) {
	whole := twoDays(t).Loads[0].Periods[0]
	part := whole
	part.AccountedTo = part.Start.Add(90 * time.Minute)
	if got := partName(&whole) + "|" + partName(&part); got != "|to 25 Oct 01:30 +01:00" {
		t.Errorf("%q", got)
	}
}

// What cannot be told has a dash, and nothing is not a number.
func TestAccountOfNothingMeasured(t *testing.T) {
	r := twoDays(t)
	r.Loads[0].Periods[0] = answer.PeriodReport{Start: r.From, End: r.From.Add(time.Hour), AccountedFrom: r.From, AccountedTo: r.From.Add(time.Hour), Missing: 3600}
	x := accountOf(r, shown.Usual()).Tables[0].Groups[0].Rows[0]
	got := strings.Join(strings.Fields(strings.Join([]string{x.Given, x.Taken, x.Spread, x.Mean, x.MeanSpread, x.Peak, x.PeakAt, x.Coverage, x.Measured, x.Missing}, " ")), " ")
	if want := "– – – – – – – 0.0 % 0:00:00 1:00:00"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
}

// BenchmarkAccount makes the longest account that a history answers: a year of hours, and a half.
func BenchmarkAccount(b *testing.B) {
	l := answer.LoadReport{Load: "hall"}
	begin := time.Date(2026, 1, 1, 0, 0, 0, 0, time.UTC)
	for i := range 12_000 {
		at := begin.Add(time.Duration(i) * time.Hour)
		l.Periods = append(l.Periods, even(at, at.Add(time.Hour), float64(i%60)))
	}
	end := begin.Add(12_000 * time.Hour)
	l.Total = even(begin, end, 0)
	p, source := mill(b, cooler())
	source.report = func(answer.Query) (*answer.Report, error) {
		return &answer.Report{By: "hour", Zone: "UTC", From: begin, To: end, Accounted: end, Loads: []answer.LoadReport{l}}, nil
	}
	size := 0
	for b.Loop() {
		size = get(p, "/account?from=2026-01&by=hour").Body.Len()
	}
	b.ReportMetric(float64(size), "B/page")
}

// One account at a time is made; who would have to wait for long is told to ask again.
func TestAccountsAreMadeOneAtATime(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p, source := mill(t, cooler())
		free := make(chan struct{})
		var asked atomic.Int32
		source.report = func(answer.Query) (*answer.Report, error) {
			asked.Add(1)
			<-free
			return twoDays(t), nil
		}
		first := make(chan *httptest.ResponseRecorder)
		go func() { first <- get(p, "/account?from=2026-10") }()
		synctest.Wait()
		for _, path := range []string{"/account?from=2026-10", "/account.csv?from=2026-10"} {
			w := get(p, path)
			if w.Code != http.StatusServiceUnavailable || !strings.Contains(w.Body.String(), "ask for a shorter time") {
				t.Errorf("%s meanwhile: %d", path, w.Code)
			}
		}
		close(free)
		if w := <-first; w.Code != http.StatusOK || asked.Load() != 1 {
			t.Errorf("the first: %d, after %d reports", w.Code, asked.Load())
		}
		if w := get(p, "/account.csv?from=2026-10"); w.Code != http.StatusOK || asked.Load() != 2 {
			t.Errorf("the next: %d, after %d reports", w.Code, asked.Load())
		}
	})
}
