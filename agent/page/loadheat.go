package page

import (
	"context"
	"net/url"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
)

// heatPart tells the heat by periods, as bars and as a table.
type heatPart struct {
	Fault   string
	By      []link
	Bars    *bars
	Rows    []heatRow
	Given   bool // there is heat given, and so on
	Taken   bool
	Unit    string
	Account string // address of the account of the same time
	Notes   []string
	Total   heatRow
	total   *answer.PeriodReport
}

// heatRow is a period in figures.
type heatRow struct {
	When, Given, Taken, Spread, Coverage, Bridged, Mean string
	Link                                                string
}

// heatTime is how far back the heat is shown: of hours, days and months.
var heatTime = map[string]func(time.Time) time.Time{
	"hour": hours(24), "day": days(31), "month": months(24),
}

// floor is where the period begins that an instant lies in, by the clock of its zone.
func floor(t time.Time, by string) time.Time {
	y, m, d := t.Date()
	switch by {
	case "month":
		return time.Date(y, m, 1, 0, 0, 0, 0, t.Location())
	case "day":
		return time.Date(y, m, d, 0, 0, 0, 0, t.Location())
	}
	into := time.Duration(t.Minute())*time.Minute + time.Duration(t.Second())*time.Second + time.Duration(t.Nanosecond())
	return t.Add(-into)
}

func (s *loadSheet) heat(ctx context.Context) *heatPart {
	a := s.address
	p := &heatPart{By: a.byLinks(), Unit: shown.Label(s.units.Heat)}
	end := a.end(s.now).In(s.zone)
	q := answer.Query{From: periodText(floor(heatTime[a.by](end), a.by), a.by), By: a.by, Loads: []string{s.load.Name}, Demand: answer.NoDemand}
	if !a.live() {
		q.To = end.Format(addressMinute)
	}
	p.Account = accountLink(q, a.units)
	r, err := s.source.Report(ctx, q)
	switch {
	case err != nil:
		p.Fault = why(err)
		return p
	case len(r.Loads) == 0 || len(r.Loads[0].Periods) == 0:
		p.Fault = "Nothing is accounted for in this time."
		return p
	}
	l := &r.Loads[0]
	p.Notes, p.total = r.Notes, &l.Total
	s.fillHeat(p, l)
	return p
}

// periodText writes where a period begins for a query: a day as such, since midnight may be
// passed over or shown twice.
func periodText(t time.Time, by string) string {
	switch by {
	case "month":
		return t.Format("2006-01")
	case "day":
		return t.Format("2006-01-02")
	}
	return t.Format(addressMinute)
}

// accountLink is the account of the same time.
func accountLink(q answer.Query, units url.Values) string {
	q.Demand = 0
	v := q.Values()
	for name, texts := range units {
		v[name] = texts
	}
	return "/account?" + v.Encode()
}

func (s *loadSheet) fillHeat(p *heatPart, l *answer.LoadReport) {
	all := make([]heatBar, 0, len(l.Periods))
	every := labelEvery(len(l.Periods))
	for i := range l.Periods {
		x := &l.Periods[i]
		p.Given, p.Taken = p.Given || x.Given > 0, p.Taken || x.Taken > 0
		row := s.heatRow(x)
		row.When = periodName(x.Start.In(s.zone), s.address.by)
		row.Link = s.upTo(x.End).over(spanOf(s.address.by)).link("course")
		b := s.heatBar(x)
		b.Title, b.Link = barTitle(&row, p.Unit), row.Link
		if i%every == 0 {
			b.Label = periodLabel(x.Start.In(s.zone), s.address.by)
		}
		all = append(all, b)
		p.Rows = append(p.Rows, row)
	}
	p.Total = s.heatRow(&l.Total)
	p.Bars = drawBars("heat by "+s.address.by, p.Unit, all)
}

// upTo is the address of the course up to an instant, or to the present where that is to come.
func (s *loadSheet) upTo(t time.Time) loadAddress {
	if t.After(s.now) {
		return s.address.until(time.Time{})
	}
	return s.address.until(t)
}

func (s *loadSheet) heatBar(x *answer.PeriodReport) heatBar {
	u := s.units.Heat
	return heatBar{
		Given: u.Of(x.Given), Taken: u.Of(x.Taken), Expanded: x.Expanded / u.Factor,
		Measured: x.Measured, Bridged: x.Bridged, Whole: x.End.Sub(x.Start).Seconds(),
	}
}

func (s *loadSheet) heatRow(x *answer.PeriodReport) heatRow {
	u := s.units.Heat
	r := heatRow{Coverage: coverageText(x.Coverage)}
	r.Given, r.Spread = shown.Figure(u, x.Given, x.Expanded)
	r.Taken, _ = shown.Figure(u, x.Taken, x.Expanded)
	if both := x.Bridged + x.Measured + x.Missing; both > 0 {
		r.Bridged = percentText(x.Bridged / both)
	}
	if x.Mean != nil {
		r.Mean = told(s.units.Duty, *x.Mean, answer.CoverageFactor**x.MeanU)
	}
	return r
}

// spanOf is the span of the course that shows one period.
func spanOf(by string) *span {
	switch by {
	case "hour":
		return &spans[0]
	case "day":
		return &spans[2]
	}
	return &spans[4]
}

func periodName(t time.Time, by string) string {
	switch by {
	case "hour":
		return t.Format("2 Jan 15:04 -07:00")
	case "day":
		return t.Format("Mon 2 Jan 2006")
	}
	return t.Format("January 2006")
}

// periodLabel is short, for below a bar.
func periodLabel(t time.Time, by string) string {
	switch by {
	case "hour":
		return t.Format("15:04")
	case "day":
		return t.Format("2 Jan")
	}
	return t.Format("Jan 06")
}

// labelEvery is how many bars go by one label, so that a telephone has room for all.
func labelEvery(n int) int { return max(1, (n+5)/6) }

func barTitle(r *heatRow, unit string) string {
	text := r.When + ": given " + r.Given + ", taken " + r.Taken + " " + unit
	if r.Spread != "" {
		text += ", ± " + r.Spread + " " + unit
	}
	return text + "; measured " + r.Coverage + " of the time"
}
