package page

import (
	"fmt"
	"math"
	"strings"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
	"heatreeve/thermo/unit"
)

// clockLength writes a length of time so that several add up at sight: hours, minutes, seconds.
func clockLength(seconds float64) string {
	s := int64(math.Round(seconds))
	return fmt.Sprintf("%d:%02d:%02d", s/3600, s/60%60, s%60)
}

// coverageText writes a fraction of time in per cent; no more of it than there is.
func coverageText(x float64) string {
	if x > 0 && x < 0.001 {
		return "<0.1 %"
	}
	return shown.Rounded(math.Floor(1000*x+1e-9)/10, 1) + " %"
}

// As wide as a digit and as a full stop, and blank.
const (
	digitBlank = "\u2007"
	stopBlank  = "\u2008"
)

// alignRows sets the figures of each column so that their decimal points stand below each other.
func alignRows(rows []*accountRow) {
	for _, column := range [...]func(*accountRow) *string{
		func(r *accountRow) *string { return &r.Given }, func(r *accountRow) *string { return &r.Taken }, func(r *accountRow) *string { return &r.Spread },
		func(r *accountRow) *string { return &r.Mean }, func(r *accountRow) *string { return &r.MeanSpread }, func(r *accountRow) *string { return &r.Peak },
	} {
		texts := make([]*string, len(rows))
		for i, r := range rows {
			texts[i] = column(r)
		}
		align(texts)
	}
}

// align fills texts with blanks on their right.
func align(texts []*string) {
	most := 0
	for _, t := range texts {
		most = max(most, decimalDigits(*t))
	}
	for _, t := range texts {
		n := decimalDigits(*t)
		if n == 0 && most > 0 {
			*t += stopBlank
		}
		*t += strings.Repeat(digitBlank, most-n)
	}
}

func decimalDigits(text string) int {
	_, after, _ := strings.Cut(text, ".")
	return len(after)
}

// registerLines tell what the registers hold, to the place of the uncertainty of the report: of
// all the time before it, it is no less.
func registerLines(l *answer.LoadReport, u shown.Units) []string {
	r := l.Register
	if r == nil {
		return nil
	}
	heat := func(joules float64) string { return heatText(u, joules, l.Total.Expanded) }
	lines := []string{
		fmt.Sprintf("given %s, taken %s %s", heat(r.Given), heat(r.Taken), shown.Label(u.Heat)),
		fmt.Sprintf("measured %s, bridged %s, missing %s", clockLength(r.Measured), clockLength(r.Bridged), clockLength(r.Missing)),
	}
	if r.Bridged > 0 {
		lines = append(lines, fmt.Sprintf("bridged besides: given %s, taken %s %s", heat(r.BridgedGiven), heat(r.BridgedTaken), shown.Label(u.Heat)))
	}
	if r.Uncertain > 0 {
		lines = append(lines, "by an uncertain reading: "+clockLength(r.Uncertain))
	}
	return lines
}

// witnessTable has what another meter counted beside what the load served in the same spans.
type witnessTable struct {
	Rows  []witnessRow
	Total witnessRow
}

type witnessRow struct{ Period, Offset, Counted, Served, Deviation, Spread string }

func witnessOf(r *answer.Report, l *answer.LoadReport, u shown.Units) *witnessTable {
	if l.Total.Witness == nil {
		return nil
	}
	t := &witnessTable{}
	for i := range l.Periods {
		p := &l.Periods[i]
		if p.Witness == nil {
			continue
		}
		row := witnessRowOf(p, u)
		row.Period, row.Offset = accountPeriod(p.Start, p.End, r.By), p.Start.Format("-07:00")
		if r.By == "hour" {
			row.Period = p.Start.Format("Mon 2 Jan 2006 15:04")
		}
		t.Rows = append(t.Rows, row)
	}
	t.Total = witnessRowOf(&l.Total, u)
	for _, column := range [...]func(*witnessRow) *string{
		func(r *witnessRow) *string { return &r.Counted }, func(r *witnessRow) *string { return &r.Served },
		func(r *witnessRow) *string { return &r.Deviation }, func(r *witnessRow) *string { return &r.Spread },
	} {
		texts := []*string{column(&t.Total)}
		for i := range t.Rows {
			texts = append(texts, column(&t.Rows[i]))
		}
		align(texts)
	}
	return t
}

// hundredth is a unit of fractions.
var hundredth = unit.Unit{Symbol: "%", Factor: 0.01}

// witnessRowOf shows the deviation with the part of the uncertainty that is ours: that of the
// other meter is its maker's to tell.
func witnessRowOf(p *answer.PeriodReport, u shown.Units) (x witnessRow) {
	w := p.Witness
	x.Counted, x.Served = heatText(u, w.Counted, p.Expanded), heatText(u, w.Served, p.Expanded)
	own := 0.0
	if net := math.Abs(p.Given - p.Taken); net > 0 {
		own = p.Expanded / net
	}
	x.Deviation, x.Spread = shown.Figure(hundredth, w.Deviation, own)
	if w.Deviation > 0 && strings.ContainsAny(x.Deviation, "123456789") {
		x.Deviation = "+" + x.Deviation
	}
	if x.Spread == "" {
		x.Spread = shown.None
	}
	return x
}
