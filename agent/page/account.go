package page

import (
	"bytes"
	"context"
	"errors"
	"net/http"
	"slices"
	"strings"
	"time"

	"heatreeve/agent/answer"
)

// accountPage is the account within its frame.
type accountPage struct {
	frame
	Form   accountForm
	Ways   []link
	Made   time.Time
	Report *accountSheet // nil where there is none
	Empty  string        // why there is none yet, which is no fault
	Again  string        // address of the same account
	CSV    string        // and of the same as CSV
}

// accountForm is what may be chosen.
type accountForm struct {
	From, To     dateField
	By           string
	Bys          []string
	Load         string   // the one that is asked for; "" for all
	Loads        []string // that there are
	Several      []string // those that are asked for, where there are several
	Zone, Demand string
}

// dateField is a field for a day, or for text where it has a time of day.
type dateField struct {
	Name, Value string
	Day         bool
}

// dateFieldOf shows a month as its first day.
func dateFieldOf(name, text string) dateField {
	if _, err := time.Parse("2006-01", text); err == nil {
		text += "-01"
	}
	_, err := time.Parse("2006-01-02", text)
	return dateField{name, text, text == "" || err == nil}
}

// account answers with the account of a time, to be read or printed.
func (p *Page) account(w http.ResponseWriter, r *http.Request) {
	status, body := p.accountText(r)
	if status == http.StatusServiceUnavailable {
		w.Header().Set("Retry-After", "5")
	}
	send(w, r, status, body)
}

func (p *Page) accountText(r *http.Request) (status int, body string) {
	x := accountPage{frame: p.frameOf(r, "Account", accountParameters...), Made: p.Now().In(p.Site.Zone)}
	x.Look = append(x.Look, "account.css")
	q, err := p.accountQuery(r.URL.Query())
	var report *answer.Report
	if err == nil {
		var leave func()
		report, leave, err = p.oneAccount(r.Context(), &q)
		defer leave()
	}
	status = http.StatusOK
	switch {
	case errors.Is(err, answer.ErrNoRecord) && q.usual:
		x.Empty = err.Error()
	case err != nil:
		status, x.Fault = statusOf(err), faultText(err)
	case x.Fault != "":
		status = http.StatusBadRequest
	}
	x.Form = p.accountForm(&q)
	x.Ways = p.accountWays(&x.frame, q.Loads)
	if report != nil {
		x.fill(&q, report)
	}
	return status, accountView(&x)
}

// oneAccount is the report for an account when its turn has come, and what gives the turn on: one
// at a time is made, since until it is text an account takes many times the memory of that.
func (p *Page) oneAccount(ctx context.Context, q *accountAsked) (r *answer.Report, leave func(), err error) {
	ctx, cancel := context.WithTimeout(ctx, sheetWait)
	defer cancel()
	select {
	case p.accounts <- struct{}{}:
	case <-ctx.Done():
		return nil, func() {}, ctx.Err()
	}
	r, err = p.accountReport(ctx, q)
	return r, func() { <-p.accounts }, err
}

func (p *Page) accountForm(q *accountAsked) accountForm {
	f := accountForm{
		From: dateFieldOf("from", q.From), To: dateFieldOf("to", q.To),
		By: q.By, Bys: bys[:], Zone: q.Zone, Demand: q.Values().Get("demand"),
	}
	for i := range p.Site.Loads {
		f.Loads = append(f.Loads, p.Site.Loads[i].Name)
	}
	switch len(q.Loads) {
	case 0:
	case 1:
		f.Load = q.Loads[0]
		if !slices.Contains(f.Loads, f.Load) { // of an earlier site file
			f.Loads = append(f.Loads, f.Load)
		}
	default:
		f.Several = q.Loads
	}
	return f
}

func (x *accountPage) fill(q *accountAsked, report *answer.Report) {
	x.Report = accountOf(report, x.Units)
	same := q.Query
	if same.To == "" {
		same.To = report.To.Format(addressMinute)
	}
	v := same.Values()
	x.CSV = "/account.csv?" + v.Encode()
	for name, values := range x.unitValues {
		v[name] = values
	}
	x.Again = "/account?" + legible.Replace(v.Encode())
}

// legible takes escapes from a query that it does without (RFC 3986, 3.4).
var legible = strings.NewReplacer("%3A", ":", "%2F", "/")

// accountCSV answers with the same as CSV, as heatreeve report --format csv writes it.
func (p *Page) accountCSV(w http.ResponseWriter, r *http.Request) {
	name, body, err := p.accountTable(r)
	if err != nil {
		http.Error(w, faultText(err), statusOf(err))
		return
	}
	w.Header().Set("Content-Type", "text/csv; charset=utf-8; header=present")
	w.Header().Set("Content-Disposition", `attachment; filename="`+name+`"`)
	w.Header().Set("Cache-Control", "no-store")
	_, _ = w.Write(body) // who asked has gone
}

func (p *Page) accountTable(r *http.Request) (name string, body []byte, err error) {
	q, err := p.accountQuery(r.URL.Query())
	if err != nil {
		return "", nil, err
	}
	report, leave, err := p.oneAccount(r.Context(), &q)
	defer leave()
	if err != nil {
		return "", nil, err
	}
	var b bytes.Buffer
	err = report.CSV(&b, false)
	return "account-" + report.From.Format("2006-01-02") + ".csv", b.Bytes(), err
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

// faultText tells people of an error.
func faultText(err error) string {
	if errors.Is(err, context.DeadlineExceeded) {
		return "the account took too long, or others had to be made first; ask for a shorter time, or again in a while"
	}
	return err.Error()
}
