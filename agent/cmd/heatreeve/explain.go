package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"strings"
	"unicode/utf8"

	"heatreeve/agent"
	"heatreeve/agent/answer"
	"heatreeve/agent/working"
)

// explainHelp tells what an explanation is.
const explainHelp = `The working of one figure, line by line: readings, conversions to SI, enthalpies
with their source, mass flow, duty, each share of the uncertainty, the verdict
and why. What stands between two = are numbers that are printed further up;
their result has as many digits as a pocket calculator finds with them. A load
that has no duty is explained by what is missing and what was seen last.

Without --at it is the newest figure, of a running agent that of its last beat.
TIME is written as for a report, to the second: 2026-12-31T06:00:10, and is by
the clock of the plant. What the stored readings led to then is worked by the
site file of then, which the history keeps. Where the readings are gone, the
record of their minute is explained.
`

func runExplain(ctx context.Context, c *call) error {
	var q answer.Explanation
	data := c.flags.String("data", "", "`DIR` that holds the history, or a copy of its file")
	c.flags.StringVar(&q.At, "at", "", "`TIME` of the figure; the newest without it")
	c.flags.StringVar(&q.Zone, "zone", "", "IANA `NAME` of the time zone of TIME; without it, that of the plant")
	asJSON := c.flags.Bool("json", false, "print the lines as JSON")
	if err := c.parse(1, "the load"); err != nil {
		return err
	}
	if *data == "" {
		return wrongf("heatreeve explain: --data must be given; see heatreeve explain --help")
	}
	q.Load = c.operands[0]
	w, err := agent.Explain(ctx, *data, q)
	var wrong *answer.QueryError
	switch {
	case errors.As(err, &wrong) && strings.HasPrefix(err.Error(), "load "):
		return wrongf("heatreeve explain: %w", err)
	case errors.As(err, &wrong):
		return wrongf("heatreeve explain: --%w", err)
	case err != nil:
		return err
	case *asJSON:
		return printJSON(c.stdout, w)
	}
	return tellWorking(c.stdout, w)
}

const (
	lineTime = "15:04:05.000"
)

// tellWorking writes a working for people.
func tellWorking(w io.Writer, x *working.Working) error {
	fmt.Fprintf(w, "%s\n\n", wrapped(fmt.Sprintf("%s: %s, %s and %g s on", x.Site, x.Load, x.At.Format("2006-01-02 15:04:05 -07:00"), x.Span), ""))
	var sources []string
	for _, s := range x.Sections {
		fmt.Fprintln(w, wrapped(s.Title, "    "))
		wide := symbolWidth(s.Lines)
		for _, l := range s.Lines {
			fmt.Fprintln(w, workingLine(&l, wide, &sources))
		}
		fmt.Fprintln(w)
	}
	fmt.Fprintln(w, wrapped(conclusion(x), ""))
	for _, n := range x.Notes {
		fmt.Fprintln(w, wrapped("note: "+n, "  "))
	}
	for i, s := range sources {
		fmt.Fprintln(w, wrapped(fmt.Sprintf("[%d] %s", i+1, s), "    "))
	}
	_, err := fmt.Fprintln(w, "For information only: no safety function, no billing meter.")
	return err
}

func symbolWidth(lines []working.Line) (wide int) {
	for _, l := range lines {
		wide = max(wide, utf8.RuneCountInString(l.Symbol))
	}
	return wide
}

// workingLine is one line, and what is left of it below.
func workingLine(l *working.Line, wide int, sources *[]string) string {
	first := fmt.Sprintf("  %-*s ", wide, l.Symbol)
	indent := strings.Repeat(" ", wide+5)
	if l.Symbol == "" && l.Shown == "" && l.Reading == nil {
		return set("  ", "    ", fields(l.Words))
	}
	parts := append([]string{}, fields(l.Words+":")...)
	if l.Formula != "" {
		parts = append(parts, glued(l.Law)...)
		parts = append(parts, glued("= "+l.Formula)...)
	}
	if l.Shown != "" {
		value := l.Shown
		if l.Unit != "" && l.Unit != "1" {
			value += " " + l.Unit
		}
		if l.Formula != "" {
			value = "= " + value
		}
		parts = append(parts, value)
	}
	if l.Reading != nil {
		parts = append(parts, sampleText(l.Reading)...)
	}
	if l.Source != "" {
		parts = append(parts, fmt.Sprintf("[%d]", cited(sources, l.Source)))
	}
	return set(first, indent, parts)
}

// glued are the words of a formula, of which an operator stays with what follows it.
func glued(formula string) (all []string) {
	for _, word := range strings.Fields(formula) {
		if n := len(all) - 1; n >= 0 && strings.ContainsAny(all[n], "=+−×/") && utf8.RuneCountInString(all[n]) == 1 {
			all[n] += " " + word
			continue
		}
		all = append(all, word)
	}
	return all
}

// sampleText tells a reading's tag, stamp, age and quality.
func sampleText(r *working.Sample) []string {
	quality := r.Quality
	if r.Reason != "" {
		quality += " (" + r.Reason + ")"
	}
	parts := []string{"from " + r.Tag, "at " + r.At.Format(lineTime) + ",", fmt.Sprintf("%g s old,", math.Round(r.Age*1e3)/1e3), quality}
	if r.Fault != "" {
		parts[len(parts)-1] += ","
		parts = append(parts, "not used: "+r.Fault)
	}
	return parts
}

// cited is the number of a source.
func cited(sources *[]string, source string) int {
	for i, s := range *sources {
		if s == source {
			return i + 1
		}
	}
	*sources = append(*sources, source)
	return len(*sources)
}

// conclusion is what the working comes to.
func conclusion(x *working.Working) string {
	switch {
	case x.Fault != "":
		return fmt.Sprintf("%s has no duty: %s. It is %s.", x.Load, x.Fault, x.Verdict)
	case x.Duty == nil:
		return fmt.Sprintf("%s has no duty.", x.Load)
	case x.Idle:
		return x.Load + " is idle; its duty is 0."
	}
	text := fmt.Sprintf("%s serves %s", x.Load, plusMinus(*x.Duty, x.Uncertainty))
	if x.Verdict == "" {
		return text + ", by the mean."
	}
	return text + "; it is " + x.Verdict + "."
}

// plusMinus is a duty in kW with its expanded uncertainty.
func plusMinus(duty float64, u *float64) string {
	if u == nil {
		return decimals(duty/1e3, 3) + " kW"
	}
	U := working.CoverageFactor * *u / 1e3
	return fmt.Sprintf("%s ± %s kW", decimals(duty/1e3, meant(U)), decimals(U, meant(U)))
}
