package main

import (
	"fmt"
	"heatreeve/agent/answer"
	"io"
	"iter"
	"math"
	"slices"
	"strings"
	"text/tabwriter"
	"time"
	"unicode/utf8"
)

const (
	reportLegend = `±2u: twice the standard uncertainty of given less taken.
Missing time has no heat in it. Mean duty: over the covered time, positive in the load's service.
`
	highestLegend = "Highest: the highest figure of the duty; at: in the minute or the hour from then on.\n"
	peakLegend    = "Peak: heat over time of the highest %.0f min by the local clock; of it: the covered part of that.\n"
	bridgedLegend = "Bridged: heat by a straight line over time without data; it is in no other figure.\n"
	latentLegend  = "Latent: covered time whose duty is the sensible part only.\n"
	doubtLegend   = "Uncertain: covered time for which an uncertain reading was used; its heat is in all figures.\n"
	witnessLegend = "Witness: what another meter counted, and the load served in the spans that were measured throughout.\n"
	sharesLegend  = "Shares: of the variance, largest first. What is systematic lasts; what is random averages out.\n"
	reportSafety  = "For information only: no billing meter.\n"
)

// reportTable writes a table for each load, and below them what the columns are.
func reportTable(w io.Writer, r *answer.Report, d details) error {
	if r.Site != "" {
		fmt.Fprintf(w, "%s\n\n", r.Site)
	}
	for i := range r.Loads {
		l := &r.Loads[i]
		s := sheetOf(r, l)
		fmt.Fprintf(w, "%s, %s to %s, %s\n\n%s", l.Load, clockTime(r.From), clockTime(r.To), r.Zone, s.table(l))
		s.remark(w, l)
		if hasWitness(&l.Total) {
			fmt.Fprintf(w, "\n%s", s.witnesses(l))
		}
		if d.shares {
			fmt.Fprintf(w, "\n%s", s.shares(l))
		}
		fmt.Fprintln(w)
	}
	for _, note := range r.Notes {
		fmt.Fprintf(w, "note: %s\n", note)
	}
	if r.To.After(r.Accounted) {
		fmt.Fprintf(w, "The history is accounted for up to %s.\n", clockTime(r.Accounted))
	}
	if _, err := io.WriteString(w, legend(r, d)); err != nil {
		return err
	}
	reportEvents(w, r.Events)
	return nil
}

// legend tells what the columns are that the tables have.
func legend(r *answer.Report, d details) string {
	text := reportLegend + highestLegend
	if r.Demand != 0 {
		text = reportLegend + fmt.Sprintf(peakLegend, r.Demand/60)
	}
	for _, more := range []struct {
		shown bool
		text  string
	}{{anyHas(r, hasBridged), bridgedLegend}, {anyHas(r, hasLatent), latentLegend}, {anyHas(r, hasDoubt), doubtLegend}, {anyHas(r, hasWitness), witnessLegend}, {d.shares, sharesLegend}} {
		if more.shown {
			text += more.text
		}
	}
	return text + reportSafety
}

func hasBridged(p *answer.PeriodReport) bool { return p.Bridged > 0 }
func hasLatent(p *answer.PeriodReport) bool  { return p.Latent > 0 }
func hasDoubt(p *answer.PeriodReport) bool   { return p.Uncertain > 0 }
func hasWitness(p *answer.PeriodReport) bool { return p.Witness != nil }

// anyHas tells whether any load of the report has something.
func anyHas(r *answer.Report, what func(*answer.PeriodReport) bool) bool {
	return slices.ContainsFunc(r.Loads, func(l answer.LoadReport) bool { return what(&l.Total) })
}

func clockTime(t time.Time) string { return t.Format("2006-01-02 15:04 -07:00") }

// remark tells of a load what its table cannot.
func (s *sheet) remark(w io.Writer, l *answer.LoadReport) {
	for i := range l.Periods {
		if p := &l.Periods[i]; inPart(p) {
			fmt.Fprintf(w, "* in part: %s to %s\n", clockTime(p.AccountedFrom), clockTime(p.AccountedTo))
		}
	}
	if l.Begins != nil {
		fmt.Fprintf(w, "The first record is of %s; the time before is missing in the total.\n", clockTime(*l.Begins))
	}
	if g := l.Register; g != nil {
		fmt.Fprintf(w, "Registers at the last commit: %s %s given, %s %s taken", s.heatOf(g.Given), s.heat, s.heatOf(g.Taken), s.heat)
		if g.Bridged > 0 {
			fmt.Fprintf(w, "; bridged %s %s given, %s %s taken", s.heatOf(g.BridgedGiven), s.heat, s.heatOf(g.BridgedTaken), s.heat)
		}
		fmt.Fprintln(w, ".")
	}
}

func inPart(p *answer.PeriodReport) bool {
	return !p.AccountedFrom.Equal(p.Start) || !p.AccountedTo.Equal(p.End)
}

// sheet is the table of one load, with the units and decimals that it is written in.
type sheet struct {
	by            string
	width         int // of the names of periods
	demand        bool
	heat          string  // unit of the heats
	energy        float64 // J in it
	heats, duties int     // decimals
}

func sheetOf(r *answer.Report, l *answer.LoadReport) *sheet {
	s := &sheet{by: r.By, demand: r.Demand != 0, energy: 3.6e6, heat: "kWh"}
	if max(l.Total.Given, l.Total.Taken) >= 36e9 {
		s.energy, s.heat = 3.6e9, "MWh"
	}
	s.width = nameWidths[r.By]
	var heats, duties []float64
	for _, p := range append(l.Periods, l.Total) {
		s.width = max(s.width, len(bridgedName(&p)), len(latentName(&p)), len(doubtName(&p)))
		if p.MeanU != nil && *p.MeanU > 0 {
			heats, duties = append(heats, p.Expanded/s.energy), append(duties, answer.CoverageFactor**p.MeanU/1e3)
		}
	}
	s.heats, s.duties = places(heats, 3), places(duties, 2)
	return s
}

func (s *sheet) table(l *answer.LoadReport) string {
	t := newColumns(tabwriter.AlignRight)
	s.head(t)
	for name, p := range s.rows(l) {
		s.line(t, name, p, s.by == "month" || p == &l.Total)
		s.apart(t, p)
	}
	return flushLeft(t)
}

// rows are the periods with their names, and the total.
func (s *sheet) rows(l *answer.LoadReport) iter.Seq2[string, *answer.PeriodReport] {
	return func(yield func(string, *answer.PeriodReport) bool) {
		for i := range l.Periods {
			if !yield(s.name(&l.Periods[i]), &l.Periods[i]) {
				return
			}
		}
		yield("total", &l.Total)
	}
}

// flushLeft is the table without what parts columns before the first.
func flushLeft(t *columns) string {
	var lines strings.Builder
	for line := range strings.Lines(t.String()) {
		lines.WriteString(strings.TrimPrefix(line, "  "))
	}
	return lines.String()
}

// apart adds a line for the bridged time, and one each for the latent and the uncertain,
// where there is any.
func (s *sheet) apart(t *columns, p *answer.PeriodReport) {
	empty := make([]string, s.columns()-3)
	if hasBridged(p) {
		t.line(append([]string{s.pad(bridgedName(p)), s.heatOf(p.BridgedGiven), s.heatOf(p.BridgedTaken)}, empty...)...)
	}
	if hasLatent(p) {
		t.line(append([]string{s.pad(latentName(p)), "", ""}, empty...)...)
	}
	if hasDoubt(p) {
		t.line(append([]string{s.pad(doubtName(p)), "", ""}, empty...)...)
	}
}

func bridgedName(p *answer.PeriodReport) string { return "  bridged " + clockLength(p.Bridged) }

func latentName(p *answer.PeriodReport) string { return "  latent " + clockLength(p.Latent) }

func doubtName(p *answer.PeriodReport) string { return "  uncertain " + clockLength(p.Uncertain) }

// columns is how many the main table has.
func (s *sheet) columns() int {
	if s.demand {
		return 10
	}
	return 9
}

// witnesses is the table of the periods that have a witness.
func (s *sheet) witnesses(l *answer.LoadReport) string {
	t := newColumns(tabwriter.AlignRight)
	t.line(s.pad("witness"), "counted", "served", "deviation")
	t.line(s.pad(""), s.heat, s.heat, "")
	for name, p := range s.rows(l) {
		if w := p.Witness; w != nil {
			t.line(s.pad(name), s.heatOf(w.Counted), s.heatOf(w.Served), fmt.Sprintf("%+.2f %%", 100*w.Deviation))
		}
	}
	return flushLeft(t)
}

// shareColumns is how wide the list of shares may be.
const shareColumns = 42

// shares is the table of what the uncertainty is made of.
func (s *sheet) shares(l *answer.LoadReport) string {
	t := newColumns(tabwriter.AlignRight)
	text := func(x string) string { return fmt.Sprintf("%-*s", shareColumns, x) }
	t.line(s.pad("uncertainty"), "±2u", "systematic", "random", text("shares"))
	t.line(s.pad(""), s.heat, s.heat, s.heat, text(""))
	fine := *s
	fine.heats++
	for name, p := range s.rows(l) {
		t.line(s.pad(name), fine.heatOf(p.Expanded), fine.heatOf(answer.CoverageFactor*p.Systematic), fine.heatOf(answer.CoverageFactor*p.Random), text(largest(p.Shares)))
	}
	return flushLeft(t)
}

// largest lists the shares of one percent and more, as many as there is room for.
func largest(all []answer.Share) string {
	list := ""
	for _, s := range all {
		next := fmt.Sprintf("%s %.0f %%", s.Part, 100*s.Fraction)
		if list != "" {
			next = list + ", " + next
		}
		if s.Fraction < 0.01 || utf8.RuneCountInString(next) > shareColumns {
			break
		}
		list = next
	}
	return list
}

// places is how many decimals the middle one of the uncertainties asks for.
func places(uncertainties []float64, most int) int {
	if len(uncertainties) == 0 {
		return 0
	}
	slices.Sort(uncertainties)
	return min(most, max(0, meant(uncertainties[len(uncertainties)/2])))
}

// nameWidths is how wide the name of a period is, with a mark behind it.
var nameWidths = map[string]int{"hour": 24, "day": 18, "month": 15}

// pad keeps names of periods to the left in columns that keep to the right.
func (s *sheet) pad(name string) string { return fmt.Sprintf("%-*s", s.width, name) }

func (s *sheet) head(t *columns) {
	first := []string{s.pad(s.by), "given", "taken", "±2u", "covered", "missing", "mean"}
	second := []string{s.pad(""), s.heat, s.heat, s.heat, "", "h:mm:ss", "kW", "kW", "", ""}
	if s.demand {
		t.line(append(first, "peak", "of it", "at")...)
		t.line(second...)
		return
	}
	t.line(append(first, "highest", "at")...)
	t.line(second[:9]...)
}

func (s *sheet) name(p *answer.PeriodReport) string {
	layout := map[string]string{"hour": "2006-01-02 15:04 -07:00", "day": "2006-01-02 -07:00", "month": "2006-01 -07:00"}[s.by]
	if inPart(p) {
		layout += "*"
	}
	return p.Start.Format(layout)
}

func (s *sheet) line(t *columns, name string, p *answer.PeriodReport, long bool) {
	mean := "-"
	if p.Mean != nil {
		mean = decimals(*p.Mean/1e3, s.duties)
	}
	cells := []string{s.pad(name), s.heatOf(p.Given), s.heatOf(p.Taken), s.heatOf(p.Expanded), covered(p.Coverage), clockLength(p.Missing), mean}
	switch {
	case s.demand && p.Demand != nil && p.Demand.Peak != nil:
		k := p.Demand.Peak
		cells = append(cells, decimals(k.Duty/1e3, s.duties), covered(k.Coverage), s.moment(p, k.Start, long))
	case s.demand:
		cells = append(cells, "-", "", "")
	case p.Highest != nil:
		cells = append(cells, decimals(p.Highest.Duty/1e3, s.duties), s.moment(p, p.Highest.Start, long))
	default:
		cells = append(cells, "-", "")
	}
	t.line(cells...)
}

func (s *sheet) heatOf(joules float64) string {
	if joules == 0 {
		return "0"
	}
	return decimals(joules/s.energy, s.heats)
}

// moment tells when in a period something was: the time of day, with the date in long
// ones, and the offset where it is not that of the period's beginning. Among hours it is
// left out: the hour has it.
func (s *sheet) moment(p *answer.PeriodReport, at time.Time, long bool) string {
	layout := "15:04"
	if long {
		layout = "01-02 15:04"
	}
	_, offset := at.Zone()
	if _, begins := p.Start.Zone(); begins != offset && s.by != "hour" {
		layout += " -07:00"
	}
	return at.Format(layout)
}

// covered shows a coverage in percent, rounded away from both ends.
func covered(x float64) string {
	switch {
	case x == 0 || x == 1:
		return fmt.Sprintf("%.0f %%", 100*x)
	case x < 0.001:
		return "0.1 %"
	}
	return decimals(math.Floor(1000*x)/10, 1) + " %"
}

// clockLength shows s as hours, minutes and seconds.
func clockLength(s float64) string {
	n := int64(math.Round(s))
	if n == 0 {
		return "0"
	}
	return fmt.Sprintf("%d:%02d:%02d", n/3600, n/60%60, n%60)
}
