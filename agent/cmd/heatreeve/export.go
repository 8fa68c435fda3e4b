package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/answer"
)

// exportHelp tells what an export holds.
const exportHelp = `Readings come as they were committed: in the order of time but for late ones.
time is their event time, stamped tells whether it came with the value rather
than from the clock at arrival, and the value is in SI, with its unit in its
name: K, Pa absolute, kg/s, m3/s, m3, J and the like; value_SI where there is
none, or where a tag has not always had the same, which a note on stderr tells.
Minutes and hours of a load come in the order of time; means are empty where
nothing was measured. An hour is by UTC, and outlives its minutes. All times are
UTC. csv (RFC 4180) has its units in the header; json is an object a line;
parquet has the same columns, with the time in ns, compressed with gzip, and
goes to a file or a pipe.

DATE is written as for a report; by whose clock, --zone tells. The data folder
may be that of an agent that runs: it gives the rows out, and goes on
undisturbed. A copy of the history's file does as well, on a medium that takes
no writes too. An export that did not come to its end, or could not read all,
ends with status 1.
`

func runExport(ctx context.Context, c *call) error {
	var s agent.Selection
	data := c.flags.String("data", "", "`DIR` that holds the history, or a copy of its file")
	c.flags.StringVar(&s.Tag, "tag", "", "`NAME` of the tag whose readings to export")
	c.flags.StringVar(&s.Load, "load", "", "`NAME` of the load whose minutes or hours to export")
	c.flags.StringVar(&s.By, "by", "", "`minute|hour`: the records of the load; minute unless given")
	c.flags.StringVar(&s.From, "from", "", "`DATE` at which the export begins; without it, where the history does")
	c.flags.StringVar(&s.To, "to", "", "`DATE` at which it ends, not in it any more; without it, where the history does")
	c.flags.StringVar(&s.Format, "format", "csv", "`csv|json|parquet`")
	c.flags.StringVar(&s.Zone, "zone", "", "IANA `NAME` of the time zone of the dates, such as Europe/Dublin; without it, that of the history")
	progress := c.flags.Bool("progress", false, "tell on stderr how far it is, also where that is no terminal")
	if err := c.parse(0, ""); err != nil {
		return err
	}
	if *data == "" || s.Tag == "" && s.Load == "" {
		return wrongf("heatreeve export: --data and --tag or --load must be given; see heatreeve export --help")
	}
	if _, shown := terminal(c.stdout); shown && s.Format == "parquet" {
		return wrongf("heatreeve export: --format parquet is no text: send it to a file, as in > readings.parquet")
	}
	line := newProgressLine(c, *progress)
	note := ""
	err := agent.Extract(ctx, *data, s, c.stdout, func(p agent.Progress) {
		note = p.Note
		line.tell(p)
	})
	line.end(err)
	if note != "" {
		fmt.Fprintln(c.stderr, "note:", note)
	}
	var wrong *answer.QueryError
	if errors.As(err, &wrong) {
		return wrongf("heatreeve export: --%w", err)
	}
	return err
}

// progressLine tells on stderr how far an export is: on a terminal one line that is written
// over, elsewhere a line each time.
type progressLine struct {
	w        *bufio.Writer // nil for none
	terminal bool
	every    time.Duration
	told     time.Time
	last     agent.Progress
}

func newProgressLine(c *call, wanted bool) *progressLine {
	_, shown := terminal(c.stderr)
	_, among := terminal(c.stdout) // the rows themselves
	switch {
	case shown && (wanted || !among):
		return &progressLine{w: bufio.NewWriter(c.stderr), terminal: true, every: 200 * time.Millisecond}
	case wanted:
		return &progressLine{w: bufio.NewWriter(c.stderr), every: 5 * time.Second}
	}
	return &progressLine{}
}

func (l *progressLine) tell(p agent.Progress) {
	if l.w == nil {
		return
	}
	l.last = p
	if now := time.Now(); now.Sub(l.told) >= l.every {
		l.told = now
		l.print(share(p))
	}
}

// end tells what it came to, unless it has failed.
func (l *progressLine) end(err error) {
	switch {
	case l.w == nil || l.last.Rows == 0:
		return
	case err == nil:
		l.print("100 %")
	}
	if l.terminal {
		fmt.Fprintln(l.w)
		l.w.Flush()
	}
}

func (l *progressLine) print(share string) {
	before, after := "", "\n"
	if l.terminal {
		before, after = "\r", "\x1b[K"
	}
	fmt.Fprintf(l.w, "%sexport: %d rows, up to %s, %s%s", before, l.last.Rows, l.last.At.UTC().Format("2006-01-02 15:04:05 UTC"), share, after)
	l.w.Flush() // what fails here is only the telling
}

// share is how much of the time has been passed, never all of it.
func share(p agent.Progress) string {
	all, passed := p.Until.Sub(p.First), p.At.Sub(p.First)
	if all <= 0 {
		return "99 %"
	}
	return fmt.Sprintf("%d %%", max(0, min(99, int(100*passed.Seconds()/all.Seconds()))))
}
