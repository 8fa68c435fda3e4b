package page

import (
	"fmt"
	"math"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
)

// accountSheet is a report as it is printed.
type accountSheet struct {
	*answer.Report
	Heat, Duty string // units
	Tables     []accountTable
	Happened   []eventRow
}

// accountTable is one load.
type accountTable struct {
	Load     string
	Begins   string
	Rows     []accountRow
	Total    accountRow
	Register string
	Witness  bool // there is a column for what another meter has counted
	Long     bool // begins a page when it is printed
}

// accountRow is a period, or the total.
type accountRow struct {
	Period, Part         string // Part tells where a period is not accounted for throughout
	Given, Taken, Spread string
	Bridged              string // heat
	Mean, MeanSpread     string
	Peak, PeakAt         string
	Measured, Missing    string
	BridgedTime          string
	Coverage             string
	Witness              string
}

// longTable is how many rows begin a page of their own.
const longTable = 20

func accountOf(r *answer.Report, u shown.Units) *accountSheet {
	x := &accountSheet{Report: r, Heat: shown.Label(u.Heat), Duty: shown.Label(u.Duty)}
	for i := range r.Loads {
		x.Tables = append(x.Tables, tableOf(r, &r.Loads[i], u))
	}
	for i := range r.Events {
		e := &r.Events[i]
		x.Happened = append(x.Happened, eventRow{When: e.At.Format("2 Jan 2006 15:04 -07:00"), Lasted: lasted(e), Kind: e.Kind, Subject: e.Subject, Text: e.Text})
	}
	return x
}

func tableOf(r *answer.Report, l *answer.LoadReport, u shown.Units) accountTable {
	t := accountTable{Load: l.Load, Long: len(l.Periods) > longTable}
	for i := range l.Periods {
		p := &l.Periods[i]
		row := accountRowOf(p, u)
		row.Period, row.Part = accountPeriod(p.Start, p.End, r.By), partName(p)
		t.Rows = append(t.Rows, row)
		t.Witness = t.Witness || p.Witness != nil
	}
	t.Total = accountRowOf(&l.Total, u)
	t.Total.Period = "Total"
	if l.Begins != nil {
		t.Begins = l.Begins.Format(longClock)
	}
	if x := l.Register; x != nil {
		given, taken := registered(u, x.Given), registered(u, x.Taken)
		t.Register = fmt.Sprintf("given %s, taken %s %s; bridged besides: given %s, taken %s %s", given, taken, shown.Label(u.Heat), registered(u, x.BridgedGiven), registered(u, x.BridgedTaken), shown.Label(u.Heat))
	}
	return t
}

// registered shows what a register holds, to the thousandth.
func registered(u shown.Units, joules float64) string { return shown.Rounded(u.Heat.Of(joules), 3) }

func accountRowOf(p *answer.PeriodReport, u shown.Units) accountRow {
	x := accountRow{
		Measured: duration(seconds(p.Measured)), BridgedTime: duration(seconds(p.Bridged)), Missing: duration(seconds(p.Missing)),
		Coverage: shown.Rounded(math.Floor(1000*p.Coverage)/10, 1) + " %",
	}
	if p.Measured > 0 {
		x.Given, x.Spread = shown.Figure(u.Heat, p.Given, p.Expanded)
		x.Taken, _ = shown.Figure(u.Heat, p.Taken, p.Expanded)
	}
	if p.Bridged > 0 {
		x.Bridged, _ = shown.Figure(u.Heat, p.BridgedGiven-p.BridgedTaken, p.Expanded)
	}
	if p.Mean != nil {
		x.Mean, x.MeanSpread = shown.Figure(u.Duty, *p.Mean, coverageFactor**p.MeanU)
		x.Peak, x.PeakAt = peakOf(p, u)
	}
	if p.Witness != nil {
		x.Witness = fmt.Sprintf("%+.1f %%", 100*p.Witness.Deviation)
	}
	return x
}

func seconds(s float64) time.Duration { return time.Duration(math.Round(s * 1e9)) }

// peakOf is the peak demand of the period, or the highest minute of one that has no windows.
func peakOf(p *answer.PeriodReport, u shown.Units) (text, at string) {
	duty, start := p.Highest.Duty, p.Highest.Start
	if p.Demand != nil && p.Demand.Peak != nil {
		duty, start = p.Demand.Peak.Duty, p.Demand.Peak.Start
	}
	text, _ = shown.Figure(u.Duty, duty, coverageFactor**p.MeanU)
	return text, start.Format("2 Jan 15:04 -07:00")
}

// accountPeriod names a period by the clock of its zone; an hour with its offset, since a clock
// that is set back shows one twice, and a day of 23 or 25 hours with its length.
func accountPeriod(start, end time.Time, by string) string {
	name := periodName(start, by)
	if length := end.Sub(start); by == "day" && length != 24*time.Hour {
		name += fmt.Sprintf(" (%g h)", length.Hours())
	}
	return name
}

// partName tells which part of a period its figures are for, where it is not the whole.
func partName(p *answer.PeriodReport) string {
	from, to := "", ""
	if !p.AccountedFrom.Equal(p.Start) {
		from = "from " + p.AccountedFrom.Format("2 Jan 15:04")
	}
	if !p.AccountedTo.Equal(p.End) {
		to = "to " + p.AccountedTo.Format("2 Jan 15:04")
	}
	if from != "" && to != "" {
		return from + " " + to
	}
	return from + to
}
