package page

import (
	"cmp"
	"context"
	"errors"
	"net/url"
	"slices"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
)

// accountParameters are those of the account besides the units.
var accountParameters = []string{"from", "to", "by", "load", "demand", "zone"}

// manyLoads is from how many loads on an account is by the month where nothing else is asked for:
// a month of days of more is longer than anybody reads.
const manyLoads = 100

// accountAsked is what an address asks for.
type accountAsked struct {
	answer.Query
	usual bool // the address does not say from when
}

// accountQuery reads the address. What is left out is this month so far, by day; a field of the
// form that was left empty is left out.
func (p *Page) accountQuery(v url.Values) (q accountAsked, err error) {
	asked := url.Values{}
	for name, texts := range v {
		texts = slices.DeleteFunc(slices.Clone(texts), func(s string) bool { return s == "" })
		if len(texts) > 0 && !slices.Contains(shown.Kinds(), name) {
			asked[name] = texts
		}
	}
	q.Query, err = answer.QueryOf(asked)
	if q.usual = q.From == ""; q.usual {
		q.From = p.accountedTo().Format("2006-01")
	}
	usual := "day"
	if len(p.Site.Loads) > manyLoads && len(q.Loads) == 0 {
		usual = "month"
	}
	q.By = cmp.Or(q.By, usual)
	return q, err
}

// accountedTo is an instant of the last minute that may be accounted for, by the clock of the site.
func (p *Page) accountedTo() time.Time {
	t := p.Now()
	if s := p.Snapshot(); s != nil && s.At > 0 {
		t = time.Unix(0, s.At)
	}
	return t.Add(-time.Minute).In(p.Site.Zone)
}

// accountReport asks for the account. Where the address does not say from when, it is from the
// beginning of a younger history on, and of the month before in the first minutes of one.
func (p *Page) accountReport(ctx context.Context, q *accountAsked) (*answer.Report, error) {
	r, err := p.Source.Report(ctx, q.Query)
	switch {
	case !q.usual:
		return r, err
	case errors.Is(err, answer.ErrNoRecord):
		before := *q
		y, m, _ := p.accountedTo().Date()
		before.From = time.Date(y, m-1, 1, 0, 0, 0, 0, time.UTC).Format("2006-01")
		if r, again := p.Source.Report(ctx, before.Query); again == nil {
			*q = before
			return r, nil
		}
		return nil, err
	case err != nil:
		return nil, err
	}
	begins, younger := firstRecord(r)
	if !younger {
		return r, nil
	}
	q.From = begins.Format("2006-01-02")
	return p.Source.Report(ctx, q.Query)
}

// firstRecord is the first record of all loads, where it lies on a later day than the report
// begins on.
func firstRecord(r *answer.Report) (first time.Time, younger bool) {
	for i := range r.Loads {
		b := r.Loads[i].Begins
		if b == nil {
			return first, false
		}
		if first.IsZero() || b.Before(first) {
			first = *b
		}
	}
	return first, len(r.Loads) > 0 && floor(first, "day").After(r.From)
}

// accountWays lead to the times that are mostly asked for.
func (p *Page) accountWays(f *frame, loads []string) (all []link) {
	t := p.accountedTo()
	y, m, d := t.Date()
	day := func(y int, m time.Month, d int) string {
		return time.Date(y, m, d, 0, 0, 0, 0, time.UTC).Format("2006-01-02")
	}
	for _, w := range []struct{ words, from, to, by string }{
		{"today by hour", day(y, m, d), "", "hour"},
		{"yesterday by hour", day(y, m, d-1), day(y, m, d), "hour"},
		{"this month by day", day(y, m, 1), "", "day"},
		{"last month by day", day(y, m-1, 1), day(y, m, 1), "day"},
		{"this year by month", day(y, 1, 1), "", "month"},
	} {
		parameters := []string{"from", w.from, "to", w.to, "by", w.by}
		for _, l := range loads {
			parameters = append(parameters, "load", l)
		}
		all = append(all, link{Text: w.words, To: f.Link("/account", parameters...)})
	}
	return all
}
