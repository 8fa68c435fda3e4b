package page

import (
	"strconv"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
)

// accountSheet is a report as it is printed.
type accountSheet struct {
	*answer.Report
	Heat, Duty string // units
	Peak       string // what the columns of the peak are of
	Tables     []accountTable
	Sums       []accountSum // of all loads, where there are several
	Bridged    bool         // some load has such time, and so on
	Latent     bool
	Uncertain  bool
	Witnessed  bool
	Happened   []eventRow
	More       int // events that are left out
}

// accountSum is the total of a load, beside those of others.
type accountSum struct {
	ID, Load string
	accountRow
}

// mostHappened is how many events an account tells; the others are counted.
const mostHappened = 300

// accountMinute writes an instant, with its offset: a clock that is set back shows an hour twice.
const accountMinute = "Mon 2 Jan 2006 15:04 -07:00"

func accountOf(r *answer.Report, u shown.Units) *accountSheet {
	x := &accountSheet{Report: r, Heat: shown.Label(u.Heat), Duty: shown.Label(u.Duty), Peak: "Highest"}
	if r.Demand != 0 {
		x.Peak = "Peak of " + brief(r.Minutes(), 1) + "\u00a0min"
	}
	for i := range r.Loads {
		l := &r.Loads[i]
		x.Tables = append(x.Tables, tableOf(r, l, u, "load-"+strconv.Itoa(i+1)))
		x.Bridged = x.Bridged || l.Total.Bridged > 0
		x.Latent = x.Latent || l.Total.Latent > 0
		x.Uncertain = x.Uncertain || l.Total.Uncertain > 0
		x.Witnessed = x.Witnessed || l.Total.Witness != nil
	}
	x.Sums = sumsOf(r, x.Tables, u)
	x.More = max(0, len(r.Events)-mostHappened)
	for i := range r.Events[:len(r.Events)-x.More] {
		e := &r.Events[i]
		row := eventRow{When: e.At.Format(accountMinute), Kind: e.Kind, Subject: e.Subject, Text: e.Text}
		if row.Lasted = lasted(e); row.Lasted == "" {
			row.Lasted = shown.None
		}
		x.Happened = append(x.Happened, row)
	}
	return x
}

func sumsOf(r *answer.Report, tables []accountTable, u shown.Units) []accountSum {
	if len(tables) < 2 {
		return nil
	}
	all, rows := make([]accountSum, len(tables)), make([]*accountRow, len(tables))
	for i := range tables {
		all[i] = accountSum{tables[i].ID, tables[i].Load, totalOf(r, &r.Loads[i], u)}
		rows[i] = &all[i].accountRow
	}
	alignRows(rows)
	return all
}

// Ends tells how far the report goes that is to end later.
func (x *accountSheet) Ends() time.Time {
	if x.To.After(x.Accounted) {
		return x.Accounted
	}
	return x.To
}

// When writes an instant.
func (x *accountSheet) When(t time.Time) string { return t.Format(accountMinute) }
