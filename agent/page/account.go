package page

import (
	"bytes"
	"cmp"
	"context"
	"errors"
	"net/http"
	"net/url"
	"time"

	"heatreeve/agent/answer"
)

// accountParameters are those of the account besides the units.
var accountParameters = []string{"from", "to", "by", "load", "zone"}

// accountPage is the account within its frame.
type accountPage struct {
	frame
	Query  answer.Query
	Loads  []string // of the site, for the form
	Load   string   // the one that is asked for; "" for all
	Bys    []string
	Made   time.Time
	Report *accountSheet // nil where there is none
	CSV    string        // address of the same as CSV
}

// accountQuery reads the address. What is left out is this month so far, by day.
func (p *Page) accountQuery(v url.Values) (q answer.Query, err error) {
	asked := url.Values{}
	for _, name := range accountParameters {
		for _, text := range v[name] {
			if text != "" {
				asked.Add(name, text)
			}
		}
	}
	if q, err = answer.QueryOf(asked); err != nil {
		return q, err
	}
	if q.From == "" {
		q.From = p.Now().In(p.Site.Zone).Format("2006-01")
	}
	q.By = cmp.Or(q.By, "day")
	return q, nil
}

// account answers with the account of a time, to be read or printed.
func (p *Page) account(w http.ResponseWriter, r *http.Request) {
	v := r.URL.Query()
	x := accountPage{frame: p.frameOf(r, "Account", accountParameters...), Bys: bys[:], Load: v.Get("load"), Made: p.Now().In(p.Site.Zone)}
	x.Look = append(x.Look, "account.css")
	for i := range p.Site.Loads {
		x.Loads = append(x.Loads, p.Site.Loads[i].Name)
	}
	var err error
	if x.Query, err = p.accountQuery(v); err == nil {
		err = x.fill(r.Context(), p)
	}
	status := http.StatusOK
	switch {
	case err != nil:
		status, x.Fault = statusOf(err), err.Error()
	case x.Fault != "":
		status = http.StatusBadRequest
	}
	p.render(w, status, "account.html", &x)
}

func (x *accountPage) fill(ctx context.Context, p *Page) error {
	report, err := p.Source.Report(ctx, x.Query)
	if err != nil {
		return err
	}
	x.Report = accountOf(report, x.Units)
	x.CSV = "/account.csv?" + x.Query.Values().Encode()
	return nil
}

// accountCSV answers with the same as CSV, as heatreeve report --format csv writes it.
func (p *Page) accountCSV(w http.ResponseWriter, r *http.Request) {
	q, err := p.accountQuery(r.URL.Query())
	var report *answer.Report
	if err == nil {
		report, err = p.Source.Report(r.Context(), q)
	}
	var b bytes.Buffer
	if err == nil {
		err = report.CSV(&b, false)
	}
	if err != nil {
		http.Error(w, err.Error(), statusOf(err))
		return
	}
	w.Header().Set("Content-Type", "text/csv; charset=utf-8; header=present")
	w.Header().Set("Content-Disposition", `attachment; filename="account.csv"`)
	w.Header().Set("Cache-Control", "no-store")
	_, _ = w.Write(b.Bytes()) // who asked has gone
}

// statusOf is how an error is answered.
func statusOf(err error) int {
	var wrong *answer.QueryError
	switch {
	case errors.As(err, &wrong):
		return http.StatusBadRequest
	case errors.Is(err, answer.ErrNoRecord):
		return http.StatusNotFound
	case errors.Is(err, context.DeadlineExceeded):
		return http.StatusServiceUnavailable
	}
	return http.StatusInternalServerError
}
