package main

import (
	"context"
	"errors"
	"fmt"
	"strings"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/answer"
	"heatreeve/agent/site"
)

// learnHelp tells what is learned, and from what.
const learnHelp = `It fits the duty of a load to the means of one to three tags by least squares,
over a time that you name because the load was as it should be, and prints the
block baseline: for the design of the load in the site file; the agent itself
learns nothing. Samples are means over the time --by that were measured and not
idle for nine tenths of it. The first tag may have a limit, as heating has,
and hours of the day or the week may have a duty of their own: both are taken
where the samples tell so, unless --straight and --habit say otherwise. Samples
far off are left out once. How the fit is stands on stderr. Public holidays are
not known.

DATE is written as for a report. The data folder may be that of an agent that
runs, which goes on undisturbed; a copy of the history's file does as well. Tags
and their units are those of the site file.
`

func runLearn(ctx context.Context, c *call) error {
	l := agent.Lesson{}
	file := c.flags.String("site", "", "site `FILE`")
	data := c.flags.String("data", "", "`DIR` that holds the history, or a copy of its file")
	c.flags.StringVar(&l.Load, "load", "", "`NAME` of the load")
	against := c.flags.String("against", "", "`TAG[,TAG]` that the duty is fitted to, at most three")
	c.flags.StringVar(&l.From, "from", "", "`DATE` from which to learn; without it, from where the history begins")
	c.flags.StringVar(&l.To, "to", "", "`DATE` up to which to learn, not in it any more; without it, to where the history ends")
	c.flags.DurationVar(&l.By, "by", time.Hour, "`DURATION` of a sample, a part of an hour")
	c.flags.StringVar(&l.Habit, "habit", "", "`none|day|week`: which hours are told apart")
	c.flags.BoolVar(&l.Straight, "straight", false, "the first tag has no limit")
	c.flags.StringVar(&l.Zone, "zone", "", "IANA `NAME` of the time zone of the dates; without it, that of the history")
	if err := c.parse(0, ""); err != nil {
		return err
	}
	if *file == "" || *data == "" || l.Load == "" || *against == "" {
		return wrongf("heatreeve learn: --site, --data, --load and --against must be given; see heatreeve learn --help")
	}
	l.Against = strings.Split(*against, ",")
	s, err := site.Load(*file)
	if err != nil {
		return err
	}
	x, err := agent.Learn(ctx, *data, s, l)
	var wrong *answer.QueryError
	switch {
	case errors.As(err, &wrong):
		return wrongf("heatreeve learn: --%w", err)
	case err != nil:
		return err
	}
	fmt.Fprintln(c.stderr, x.Account())
	_, err = fmt.Fprint(c.stdout, x.Block)
	return err
}
