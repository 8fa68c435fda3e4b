package main

import (
	"context"
	"errors"
	"fmt"
	"io"

	"heatreeve/agent"
	"heatreeve/agent/answer"
)

// reportHelp tells what a report needs and holds.
const reportHelp = `The data folder may be that of an agent that runs: it is asked then, and goes on
undisturbed. A copy of the history's file does as well. DATE is a day
(2026-12-31) or a month (2026-12) by the clock of the plant, a local time
(2026-12-31T06:00), or one with its offset to UTC (2026-12-31T06:00+01:00).
--to is the end and not in the report any more; without it, the report goes as
far as the history.

Uncertainties are those of given less taken as measured, with the coverage
factor 2 in table and csv; json is SI, and has the standard one too. What lasts,
such as the error of an instrument, does not average out of them, what is random
does; --shares shows both in the table, and what each input has in them. csv has
both without it, json the inputs too.

Heat that was bridged is told apart, and in no other figure; missing time has no
heat in it. By day and by month the peak demand is that of 15 minutes. csv has
no line of totals, and its notes and events go to stderr. A load whose name a
spreadsheet would take for a formula (= + - @ first) has an apostrophe before it
in csv. A report that had to leave out damaged records ends with status 1.

What happened beside the accounts stands last: starts and stops, another site
file, a disk that took nothing, readings given up, a clock that was set, damage.
`

// details are what a report may show beyond its usual columns.
type details struct {
	shares bool // what the uncertainty is made of
}

var formats = map[string]func(io.Writer, *answer.Report, details) error{
	"table": reportTable,
	"csv":   func(w io.Writer, r *answer.Report, d details) error { return r.CSV(w, d.shares) },
	"json":  func(w io.Writer, r *answer.Report, _ details) error { return printJSON(w, r) },
}

func runReport(ctx context.Context, c *call) error {
	var q answer.Query
	var d details
	var demand string
	data := c.flags.String("data", "", "`DIR` that holds the history, or a copy of its file")
	c.flags.StringVar(&q.From, "from", "", "`DATE` at which the report begins")
	c.flags.StringVar(&q.To, "to", "", "`DATE` at which it ends")
	c.flags.StringVar(&q.By, "by", "day", "periods: `hour|day|month`")
	c.flags.Func("load", "`NAME` of a load; may be given again; without it, all", func(name string) error {
		q.Loads = append(q.Loads, name)
		return nil
	})
	c.flags.StringVar(&demand, "demand", "", "show the peak demand over windows of `LENGTH`: 5m, 10m, 15m, 20m, 30m, 1h or none; without it, 15m by day and by month")
	c.flags.BoolVar(&d.shares, "shares", false, "show what the uncertainty is made of, largest first")
	format := c.flags.String("format", "table", "`table|csv|json`")
	c.flags.StringVar(&q.Zone, "zone", "", "IANA `NAME` of the time zone, such as Europe/Dublin; without it, that of the history or the site file")
	file := c.flags.String("site", "", "site `FILE` whose time zone to go by")
	if err := c.parse(0, ""); err != nil {
		return err
	}
	if *data == "" || q.From == "" {
		return wrongf("heatreeve report: --data and --from must be given; see heatreeve report --help")
	}
	if err := q.SetDemand(demand); err != nil {
		return wrongf("heatreeve report: --%w", err)
	}
	write := formats[*format]
	if write == nil {
		return wrongf("heatreeve report: --format %q: allowed are table, csv, json", *format)
	}
	if *file != "" && q.Zone == "" {
		s, err := load(*file)
		if err != nil {
			return err
		}
		q.Zone = s.Zone.String()
	}
	r, err := agent.Inquire(ctx, *data, q)
	var wrong *answer.QueryError
	switch {
	case errors.As(err, &wrong):
		return wrongf("heatreeve report: --%w", err)
	case err != nil:
		return err
	}
	if err := write(c.stdout, r, d); err != nil {
		return err
	}
	return tellReport(c.stderr, r, *format)
}

// tellReport puts on w what of the report its form has no room for. The error says that it is
// not whole.
func tellReport(w io.Writer, r *answer.Report, format string) error {
	if format == "csv" {
		for _, note := range r.Notes {
			fmt.Fprintln(w, "note:", note)
		}
		for i := range r.Events {
			fmt.Fprintln(w, "event:", eventLine(&r.Events[i]))
		}
	}
	if r.Unused > 0 {
		return fmt.Errorf("%d records of the history cannot be used, and are missing in the report; see its notes", r.Unused)
	}
	return nil
}
