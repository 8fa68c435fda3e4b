package page

import (
	"fmt"
	"strconv"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
)

// accountTable is one load.
type accountTable struct {
	ID, Load string
	Begins   string // the first record, where it is later than the report begins
	Groups   []accountGroup
	Total    accountRow
	Register []string
	Witness  *witnessTable
	Long     bool // begins a page when it is printed
}

// accountGroup has the hours of a day, or all periods.
type accountGroup struct {
	Head string
	Rows []accountRow
}

// accountRow is a period, or the total.
type accountRow struct {
	Period, Part         string // Part tells where a period is not accounted for throughout
	Offset               string // of the clock to UTC where the period begins
	Given, Taken, Spread string
	Mean, MeanSpread     string
	Peak, PeakAt         string
	Coverage             string
	Measured             string
	Bridged, Missing     string
	Beside               []string // what is in no column
}

// longTable is how many rows begin a page of their own.
const longTable = 20

func tableOf(r *answer.Report, l *answer.LoadReport, u shown.Units, id string) accountTable {
	t := accountTable{ID: id, Load: l.Load, Long: len(l.Periods) > longTable}
	if l.Begins != nil {
		t.Begins = l.Begins.Format(accountMinute)
	}
	var all []*accountRow
	for i := range l.Periods {
		p := &l.Periods[i]
		if head := groupHead(p.Start, r.By); len(t.Groups) == 0 || t.Groups[len(t.Groups)-1].Head != head {
			t.Groups = append(t.Groups, accountGroup{Head: head})
		}
		g := &t.Groups[len(t.Groups)-1]
		row := accountRowOf(p, u)
		row.Period, row.Offset, row.Part = accountPeriod(p.Start, p.End, r.By), p.Start.Format("-07:00"), partName(p)
		row.PeakAt = peakTime(p, r.By, r.Demand)
		g.Rows = append(g.Rows, row)
	}
	for i := range t.Groups {
		for k := range t.Groups[i].Rows {
			all = append(all, &t.Groups[i].Rows[k])
		}
	}
	t.Total = totalOf(r, l, u)
	alignRows(append(all, &t.Total))
	t.Register = registerLines(l, u)
	t.Witness = witnessOf(r, l, u)
	return t
}

func totalOf(r *answer.Report, l *answer.LoadReport, u shown.Units) accountRow {
	x := accountRowOf(&l.Total, u)
	x.Period, x.PeakAt = "Total", peakTime(&l.Total, "", r.Demand)
	return x
}

func accountRowOf(p *answer.PeriodReport, u shown.Units) accountRow {
	x := accountRow{
		Given: shown.None, Taken: shown.None, Spread: shown.None, Mean: shown.None, MeanSpread: shown.None, Peak: shown.None,
		Measured: clockLength(p.Measured), Bridged: clockLength(p.Bridged), Missing: clockLength(p.Missing),
		Coverage: coverageText(p.Coverage), Beside: beside(p, u),
	}
	if p.Measured > 0 {
		x.Given, x.Taken = heatText(u, p.Given, p.Expanded), heatText(u, p.Taken, p.Expanded)
		if _, spread := shown.Figure(u.Heat, p.Given, p.Expanded); spread != "" {
			x.Spread = spread
		}
	}
	if p.Mean != nil {
		text, spread := shown.Figure(u.Duty, *p.Mean, answer.CoverageFactor**p.MeanU)
		x.Mean = text
		if spread != "" {
			x.MeanSpread = spread
		}
		x.Peak, _ = shown.Figure(u.Duty, peakDuty(p), answer.CoverageFactor**p.MeanU)
	}
	return x
}

// heatText shows heat to the place of its uncertainty, and none at all as 0.
func heatText(u shown.Units, joules, expanded float64) string {
	if joules == 0 {
		return "0"
	}
	text, _ := shown.Figure(u.Heat, joules, expanded)
	return text
}

// beside tells of time and heat that have no column.
func beside(p *answer.PeriodReport, u shown.Units) (all []string) {
	if p.Bridged > 0 {
		all = append(all, fmt.Sprintf("bridged besides: given %s, taken %s %s", heatText(u, p.BridgedGiven, p.Expanded), heatText(u, p.BridgedTaken, p.Expanded), shown.Label(u.Heat)))
	}
	if p.Latent > 0 {
		all = append(all, "latent, sensible part only: "+clockLength(p.Latent))
	}
	if p.Uncertain > 0 {
		all = append(all, "by an uncertain reading: "+clockLength(p.Uncertain))
	}
	return all
}

// peakDuty is the peak demand of the period, or the highest figure of one that has no windows.
func peakDuty(p *answer.PeriodReport) float64 {
	if p.Demand != nil && p.Demand.Peak != nil {
		return p.Demand.Peak.Duty
	}
	return p.Highest.Duty
}

// peakTime is when that was: the time of day within a day, else the day too; with the offset
// where it is another one than at the beginning of the period, and with the part of the window
// that was covered, where that is not the whole.
func peakTime(p *answer.PeriodReport, by string, demand float64) string {
	var at time.Time
	covered := 1.0
	switch {
	case p.Mean == nil:
		return shown.None
	case p.Demand != nil && p.Demand.Peak != nil:
		at, covered = p.Demand.Peak.Start, p.Demand.Peak.Coverage
	default:
		at = p.Highest.Start
	}
	layout := "2\u00a0Jan 15:04"
	if by == "hour" || by == "day" {
		layout = "15:04"
	}
	_, offset := at.Zone()
	if _, first := p.Start.Zone(); offset != first {
		layout += " -07:00"
	}
	text := at.Format(layout)
	if demand != 0 && covered < 1 {
		text += " (" + strconv.Itoa(int(100*covered+1e-9)) + "\u00a0%)"
	}
	return text
}

// groupHead names the day that an hour belongs to.
func groupHead(start time.Time, by string) string {
	if by != "hour" {
		return ""
	}
	from, to := account.Day.Bounds(start.UnixNano(), start.Location())
	return dayName(time.Unix(0, from).In(start.Location()), time.Unix(0, to).In(start.Location()))
}

// accountPeriod names a period by the clock of its zone.
func accountPeriod(start, end time.Time, by string) string {
	switch by {
	case "hour":
		return start.Format("15:04")
	case "day":
		return dayName(start, end)
	}
	name := start.Format("January 2006")
	if h := end.Sub(start).Hours(); int(h)%24 != 0 {
		name += fmt.Sprintf(" (%g h)", h)
	}
	return name
}

// dayName names a day; one that has not 24 hours with its length.
func dayName(start, end time.Time) string {
	name := start.Format("Mon 2 Jan 2006")
	if length := end.Sub(start); length != 24*time.Hour {
		name += fmt.Sprintf(" (%g h)", length.Hours())
	}
	return name
}

// partName tells which part of a period its figures are for, where it is not the whole.
func partName(p *answer.PeriodReport) string {
	from, to := "", ""
	if !p.AccountedFrom.Equal(p.Start) {
		from = "from " + p.AccountedFrom.Format("2 Jan 15:04 -07:00")
	}
	if !p.AccountedTo.Equal(p.End) {
		to = "to " + p.AccountedTo.Format("2 Jan 15:04 -07:00")
	}
	if from != "" && to != "" {
		return from + " " + to
	}
	return from + to
}
