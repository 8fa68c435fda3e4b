package page

import (
	"fmt"
	"net/http"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/answer"
)

// twoDays is a report over the two days on which the clocks of Dublin are set.
func twoDays(t *testing.T) *answer.Report {
	t.Helper()
	dublin, err := time.LoadLocation("Europe/Dublin")
	if err != nil {
		t.Fatal(err)
	}
	day := func(y int, m time.Month, d int) (time.Time, time.Time) {
		return time.Date(y, m, d, 0, 0, 0, 0, dublin), time.Date(y, m, d+1, 0, 0, 0, 0, dublin)
	}
	mean, u := 500e3, 4e3
	period := func(start, end time.Time, missing float64) answer.PeriodReport {
		whole := end.Sub(start).Seconds()
		heat := mean * (whole - missing)
		return answer.PeriodReport{
			Start: start, End: end, AccountedFrom: start, AccountedTo: end, Given: heat, Expanded: 0.016 * heat,
			Measured: whole - missing, Missing: missing, Coverage: 1 - missing/whole, Mean: &mean, MeanU: &u,
			Lowest: &answer.Extreme{}, Highest: &answer.Extreme{Duty: 620e3, Start: start.Add(time.Hour)},
			Demand: &answer.Demand{Peak: &answer.Peak{Duty: 560e3, Start: start.Add(2 * time.Hour)}}, Witness: &answer.Witness{Deviation: -0.012},
		}
	}
	long, next := day(2026, 10, 25)
	short, end := day(2027, 3, 28)
	return &answer.Report{
		Site: "Mill", Zone: "Europe/Dublin", By: "day", From: long, To: end, Accounted: end, Factor: 2, Demand: 900,
		SiteFiles: []answer.SiteFile{{From: time.Unix(0, 0), SHA256: strings.Repeat("ab", 32)}, {From: short, SHA256: strings.Repeat("cd", 32)}},
		Loads: []answer.LoadReport{{
			Load: `<b>"hall"</b>`, Periods: []answer.PeriodReport{period(long, next, 0), period(short, end, 3661)}, Total: period(long, end, 3661),
			Register: &answer.Register{Given: 8.64e10},
		}},
		Notes: []string{"hall: of 2 hours not all minutes are left"}, Unused: 3,
		Events: []answer.Event{{At: long, Kind: "started", Text: "heatreeve 1"}},
	}
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
	text := words(w.Body.String())
	for _, want := range []string{
		"Sun 25 Oct 2026 (25 h)45.000.000.720.5000 ± 0.00800.560025 Oct 01:00 +00:001 d 1 h0 s0 s100.0 %-1.2 %",
		"Sun 28 Mar 2027 (23 h)39.570.000.630.5000 ± 0.00800.560028 Mar 03:00 +01:0021 h 58 min1 h 1 min0 s95.5 %-1.2 %",
		"GivenGJ", "Mean dutyMW", "abababababababab since the beginning", "cdcdcdcdcdcdcdcd since Sun 28 Mar 2027 00:00 +00:00", "by the clock of Europe/Dublin",
		"No safety function.", "Registers since the beginning: given 86.400, taken 0.000 GJ", "not all minutes are left", "3 records of the history cannot be used", "25 Oct 2026 00:00 +01:00, lasting: started, heatreeve 1",
		"greatest mean duty of 15 min",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("%q is not in the account: %s", want, text)
		}
	}
	if strings.Contains(w.Body.String(), `<b>"hall"`) {
		t.Error("the name of a load is markup")
	}
	if asked.From != "2026-10-25" || asked.To != "2027-03-29" || asked.By != "day" || len(asked.Loads) != 0 {
		t.Errorf("asked for %+v", asked)
	}
	csv := get(p, "/account.csv?from=2026-10-25&to=2027-03-29&by=day")
	lines := strings.Split(strings.TrimSpace(csv.Body.String()), "\r\n")
	if len(lines) != 3 || !strings.HasPrefix(lines[1], `"<b>""hall""</b>",2026-10-25T00:00:00+01:00,2026-10-26T00:00:00+00:00`) || !strings.Contains(csv.Header().Get("Content-Disposition"), "account.csv") {
		t.Errorf("csv %q", lines)
	}
}

// Without parameters it is this month by the clock of the site; what is wrong is told beside
// the form, with a status that says so.
func TestAccountOfWhat(t *testing.T) {
	p, source := mill(t, cooler())
	for _, tt := range []struct {
		query  string
		err    error
		status int
		from   string
	}{
		{"", nil, http.StatusOK, "2026-12"},
		{"?from=2026-13", answer.Wrongf("from %q is no date", "2026-13"), http.StatusBadRequest, "2026-13"},
		{"?from=2020-01", fmt.Errorf("%w of hall", answer.ErrNoRecord), http.StatusNotFound, "2020-01"},
		{"?from=2020-01", errNothing, http.StatusInternalServerError, "2020-01"},
		{"?duty=furlong", nil, http.StatusBadRequest, "2026-12"},
	} {
		source.report = func(q answer.Query) (*answer.Report, error) {
			if q.From != tt.from || q.By != "day" {
				t.Errorf("%s: asked for %+v", tt.query, q)
			}
			return twoDays(t), tt.err
		}
		w := get(p, "/account"+tt.query)
		if w.Code != tt.status || tt.err != nil && !strings.Contains(words(w.Body.String()), tt.err.Error()) || !strings.Contains(w.Body.String(), `value="`+tt.from+`"`) {
			t.Errorf("%s: %d %s", tt.query, w.Code, words(w.Body.String()))
		}
		if got := get(p, "/account.csv"+tt.query).Code; got != tt.status && tt.err != nil {
			t.Errorf("%s as csv: %d", tt.query, got)
		}
	}
}

// A period that is not accounted for throughout says which part its figures are for.
func TestAccountOfPartOfAPeriod(t *testing.T) {
	whole := twoDays(t).Loads[0].Periods[0]
	part := whole
	part.AccountedTo = part.Start.Add(90 * time.Minute)
	if got := partName(&whole) + "|" + partName(&part); got != "|to 25 Oct 01:30" {
		t.Errorf("%q", got)
	}
}
