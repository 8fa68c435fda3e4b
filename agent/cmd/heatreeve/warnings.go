package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"slices"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/answer"
	"heatreeve/agent/warn"
)

const warningsHelp = `A warning stands from its begin until its subject has returned to normal. One
that returned unacknowledged stays on the list until it is acknowledged, or for
30 days. An acknowledgement ends with its warning; one that begins again within
an hour is the same warning, and unacknowledged again. Each has its greatest
deviation, since when, and what to look at first.

The data folder may be that of an agent that runs: it is asked then. A copy of
the history's file does as well; its figures are those of the last checkpoint.
Exit status 3 says that a warning stands, acknowledged, shelved or not; 0 that
none does.
`

const markHelp = `SUBJECT is a load or an exchanger. Without --kind it is done to all kinds of
warning on it. Marks change no verdict: a shelved warning is still raised, kept
and published, with its mark. A shelf ends by itself, after 30 days at most, and
--end takes it back. TIME is written as for explain.

An agent that runs on the data folder is asked, and does it for who can read its
folder; where none runs, the history is written. All is well only when the mark
is on disk.
`

// errStands says that a warning stands, which is told already.
var errStands = errors.New("a warning stands")

func runWarnings(ctx context.Context, c *call) error {
	data := c.flags.String("data", "", "`DIR` that holds the history, or a copy of its file")
	format := c.flags.String("format", "table", "`table|json`")
	if err := c.parse(0, ""); err != nil {
		return err
	}
	switch {
	case *data == "":
		return wrongf("heatreeve warnings: --data must be given; see heatreeve warnings --help")
	case *format != "table" && *format != "json":
		return wrongf("heatreeve warnings: --format %q: allowed are table, json", *format)
	}
	s, err := agent.Warnings(ctx, *data)
	if err != nil {
		return err
	}
	if *format == "json" {
		err = printJSON(c.stdout, s)
	} else {
		tellStanding(c.stdout, s)
	}
	if err == nil && slices.ContainsFunc(s.Warnings, func(d warn.Document) bool { return d.Active }) {
		return errStands
	}
	return err
}

func tellStanding(w io.Writer, s *answer.Standing) {
	fmt.Fprintln(w, wrapped(fmt.Sprintf("%s, up to %s", s.Site, s.At.Format(toTheMinute)), ""))
	if len(s.Warnings) == 0 {
		fmt.Fprintln(w, "no warnings")
	}
	for i := range s.Warnings {
		tellWarning(w, &s.Warnings[i])
	}
	for _, f := range s.Shelves {
		fmt.Fprintln(w, wrapped(fmt.Sprintf("shelf: %s of %s, until %s, by %s: %s", f.Kind, f.Subject, clockOf(*f.Until), f.By, f.Reason), "    "))
	}
	fmt.Fprintln(w, "For information only: no safety function, no alarm of record.")
}

// toTheMinute is how a time is told to people, with its offset to UTC.
const toTheMinute = "2006-01-02 15:04 -07:00"

// clockOf tells a time of a document, which has the offset of the plant, as events are.
func clockOf(stamp string) string {
	t, err := time.Parse(time.RFC3339, stamp)
	if err != nil {
		return stamp
	}
	return t.Format(toTheMinute)
}

func tellWarning(w io.Writer, d *warn.Document) {
	line := func(text string) { fmt.Fprintln(w, set("  ", "      ", fields(text))) }
	fmt.Fprintln(w, "\n"+wrapped(fmt.Sprintf("%s: %s, %s", d.Subject, d.Kind, d.State), "    "))
	if d.Deviation != nil && d.Active {
		line("now " + warn.Deviation(d.Kind, *d.Deviation))
	}
	if d.Greatest != nil {
		line("greatest " + warn.Deviation(d.Kind, *d.Greatest))
	}
	line("since " + clockOf(d.Since))
	line("raised " + clockOf(d.Begin))
	if d.End != nil {
		line("ended " + clockOf(*d.End))
	}
	if d.Times > 1 {
		line(fmt.Sprintf("has begun %d times", d.Times))
	}
	if d.Earlier > 0 {
		line(fmt.Sprintf("%d more before it were not acknowledged", d.Earlier))
	}
	if m := d.Acknowledged; m != nil {
		line(fmt.Sprintf("acknowledged %s by %s: %s", clockOf(m.At), m.By, m.Reason))
	}
	for i, x := range d.Causes {
		line(fmt.Sprintf("cause %d, weight %.2f: %s", i+1, x.Weight, x.Says))
	}
}

func runAcknowledge(ctx context.Context, c *call) error {
	return runMark(ctx, c, agent.Order{Do: agent.Acknowledge})
}

func runShelve(ctx context.Context, c *call) error {
	return runMark(ctx, c, agent.Order{Do: agent.Shelve})
}

func runMark(ctx context.Context, c *call, o agent.Order) error {
	end := false
	data := c.flags.String("data", "", "`DIR` that holds the history")
	c.flags.StringVar(&o.Kind, "kind", "", "`KIND` of warning: short, over or drifting of a load, fouling or unbalanced of an exchanger; without it, all")
	c.flags.StringVar(&o.By, "by", "", "`NAME` of who does it")
	c.flags.StringVar(&o.Reason, "reason", "", "`TEXT` that says why")
	if o.Do == agent.Shelve {
		c.flags.StringVar(&o.Until, "until", "", "`TIME` at which the shelf ends")
		c.flags.DurationVar(&o.For, "for", 0, "`DURATION` for which the shelf lasts, such as 8h; without it and --until, 8h")
		c.flags.BoolVar(&end, "end", false, "take the shelf back")
	}
	if err := c.parse(1, "the load or exchanger"); err != nil {
		return err
	}
	o.Subject = c.operands[0]
	switch {
	case *data == "" || o.By == "" || o.Reason == "":
		return wrongf("heatreeve %s: --data, --by and --reason must be given; see heatreeve %s --help", c.name, c.name)
	case end && (o.Until != "" || o.For != 0):
		return wrongf("heatreeve %s: --end ends the shelf now; leave --until and --for out", c.name)
	case end:
		o.Do = agent.Unshelve
	}
	d, err := agent.Put(ctx, *data, o)
	var wrong *answer.QueryError
	switch {
	case errors.As(err, &wrong):
		return wrongf("heatreeve %s: %w", c.name, err)
	case err != nil:
		return err
	}
	for _, text := range d.Lines {
		fmt.Fprintln(c.stdout, wrapped(text, "    "))
	}
	return nil
}
