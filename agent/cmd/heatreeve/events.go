package main

import (
	"context"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/answer"
)

const eventsHelp = `What happened beside the accounts: warnings with their greatest deviation and
first cause, what was acknowledged, shelved and unshelved, starts and stops,
another site file, a disk that took nothing, a clock that was set, damage.
Without --from and --to it is all that the history has. An event is told when
any part of it lies in the time asked for; one that lasts has no end yet.

The data folder may be that of an agent that runs: it is asked then, and goes on
undisturbed. A copy of the history's file does as well. DATE is written as for a
report.
`

func runEvents(ctx context.Context, c *call) error {
	var q answer.EventQuery
	data := c.flags.String("data", "", "`DIR` that holds the history, or a copy of its file")
	c.flags.StringVar(&q.From, "from", "", "`DATE` from which on")
	c.flags.StringVar(&q.To, "to", "", "`DATE` up to which, not in it any more")
	c.flags.StringVar(&q.Kind, "kind", "", "`KIND` of event, such as warning or acknowledged; without it, all")
	c.flags.StringVar(&q.Subject, "subject", "", "`NAME` of the load, exchanger or tag; without it, all")
	c.flags.StringVar(&q.Subject, "load", "", "`NAME`, the same as --subject")
	format := c.flags.String("format", "table", "`table|csv|json`")
	c.flags.StringVar(&q.Zone, "zone", "", "IANA `NAME` of the time zone; without it, that of the history")
	if err := c.parse(0, ""); err != nil {
		return err
	}
	write := map[string]func(io.Writer, *answer.Events) error{
		"table": eventsTable, "csv": eventsCSV,
		"json": func(w io.Writer, e *answer.Events) error { return printJSON(w, e) },
	}[*format]
	switch {
	case *data == "":
		return wrongf("heatreeve events: --data must be given; see heatreeve events --help")
	case write == nil:
		return wrongf("heatreeve events: --format %q: allowed are table, csv, json", *format)
	}
	e, err := agent.Happened(ctx, *data, q)
	var wrong *answer.QueryError
	switch {
	case errors.As(err, &wrong):
		return wrongf("heatreeve events: --%w", err)
	case err != nil:
		return err
	}
	if err := write(c.stdout, e); err != nil {
		return err
	}
	if e.Unused > 0 {
		return fmt.Errorf("%d records of what happened cannot be read, and are missing", e.Unused)
	}
	return nil
}

func eventsTable(w io.Writer, e *answer.Events) error {
	if len(e.Events) == 0 {
		_, err := fmt.Fprintln(w, "no events")
		return err
	}
	for i := range e.Events {
		if _, err := fmt.Fprintln(w, set("", "    ", fields(eventLine(&e.Events[i])))); err != nil {
			return err
		}
	}
	return nil
}

func eventsCSV(w io.Writer, e *answer.Events) error {
	out := csv.NewWriter(w)
	out.UseCRLF = true
	rows := [][]string{{"at", "until", "kind", "subject", "text"}}
	for i := range e.Events {
		x := &e.Events[i]
		until := ""
		if x.Until != nil {
			until = x.Until.Format(time.RFC3339)
		}
		rows = append(rows, []string{x.At.Format(time.RFC3339), until, x.Kind, answer.TextField(x.Subject), answer.TextField(x.Text)})
	}
	return out.WriteAll(rows)
}
