package page

import (
	"context"
	"math"
	"strings"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
	"heatreeve/agent/working"
)

// workingPart tells the working of one figure, line by line.
type workingPart struct {
	Fault    string
	When     string // of the figure
	Span     string
	Newest   bool
	Verdict  string // what it comes to
	Steps    []workingStep
	Causes   []workingCause
	Notes    []string
	Sources  []workingSource
	Quality  string
	Asked    string  // for the form: a local time
	Action   string  // of the form
	Hidden   []field // of the form
	Ways     []link
	ZoneName string
}

type workingStep struct {
	Title string
	Lines []workingLine
}

// workingLine is a line: its formulas, value and reading are empty where there are none.
type workingLine struct {
	Symbol, Words string
	Law, Formula  string
	Value         string
	Reading       string
	Unused        bool // the reading is not used
	Source        int  // number of it; 0 for none
}

// workingSource is whence values or laws are.
type workingSource struct {
	Number int
	Text   string
}

type workingCause struct {
	Kind, Subject, Says, Weight, Alike string
	Figures                            []string
}

// localMinute is how a form for a local time writes one.
const localMinute = "2006-01-02T15:04"

func (s *loadSheet) working(ctx context.Context) *workingPart {
	a := s.address
	p := &workingPart{Newest: a.at.IsZero(), Action: a.Path(), Hidden: a.hidden("at"), ZoneName: s.zone.String()}
	q := answer.Explanation{Load: s.load.Name}
	asked := s.now
	if !p.Newest {
		asked = a.at
		q.At = a.at.Format(addressMinute)
	}
	p.Asked = asked.In(s.zone).Format(localMinute)
	p.Ways = s.minutes(asked)
	w, err := s.source.Explain(ctx, q)
	if err != nil {
		p.Fault = why(err)
		return p
	}
	s.tell(p, w)
	return p
}

// minutes lead to the minute before and after, and to the newest figure.
func (s *loadSheet) minutes(asked time.Time) []link {
	a := s.address
	all := []link{{Text: "a minute earlier", To: a.minute(asked.Add(-time.Minute)).link("working")}}
	if a.at.IsZero() {
		return all
	}
	if next := asked.Add(time.Minute); next.Before(s.now) {
		all = append(all, link{Text: "a minute later", To: a.minute(next).link("working")})
	}
	return append(all, link{Text: "the newest figure", To: a.minute(time.Time{}).link("working")})
}

func (s *loadSheet) tell(p *workingPart, w *working.Working) {
	p.When, p.Span = w.At.In(s.zone).Format(longClock), duration(time.Duration(w.Span*float64(time.Second)))
	p.Verdict, p.Notes = s.comesTo(w), w.Notes
	if w.Quality != "" {
		p.Quality = w.Quality
		if w.Reason != "" {
			p.Quality += " (" + w.Reason + ")"
		}
		if w.By != "" {
			p.Quality += ", by " + w.By
		}
	}
	for i := range w.Sections {
		if w.Sections[i].Title == working.CausesTitle {
			continue // they stand before the lines
		}
		step := workingStep{Title: w.Sections[i].Title}
		for k := range w.Sections[i].Lines {
			step.Lines = append(step.Lines, p.line(&w.Sections[i].Lines[k], s.zone))
		}
		p.Steps = append(p.Steps, step)
	}
	for i := range w.Causes {
		p.Causes = append(p.Causes, causeOf(&w.Causes[i]))
	}
}

// comesTo is the end of the working in the units of the reader.
func (s *loadSheet) comesTo(w *working.Working) string {
	switch {
	case w.Fault != "" && w.Verdict != "":
		return "no duty: " + w.Fault + "; it is " + w.Verdict
	case w.Duty == nil:
		return "no duty"
	case w.Idle:
		return "idle; its duty is 0"
	}
	expanded := 0.0
	if w.Uncertainty != nil {
		expanded = working.CoverageFactor * *w.Uncertainty
	}
	text := "it serves " + told(s.units.Duty, *w.Duty, expanded)
	if w.Verdict == "" {
		return text + ", by the mean"
	}
	return text + "; it is " + w.Verdict
}

func (p *workingPart) line(l *working.Line, zone *time.Location) workingLine {
	x := workingLine{Symbol: l.Symbol, Words: l.Words, Law: l.Law, Formula: l.Formula, Value: l.Shown}
	if l.Shown != "" && l.Unit != "" && l.Unit != "1" {
		x.Value += " " + l.Unit
	}
	if r := l.Reading; r != nil {
		x.Reading, x.Unused = readingText(r, zone), r.Fault != ""
	}
	if l.Source != "" {
		x.Source = p.cite(l.Source)
	}
	return x
}

// readingText tells a reading's tag, stamp, age and quality.
func readingText(r *working.Sample, zone *time.Location) string {
	text := r.Tag + " at " + r.At.In(zone).Format("15:04:05.000") + ", " + brief(r.Age, 3) + " s old, " + r.Quality
	if r.Reason != "" {
		text += " (" + r.Reason + ")"
	}
	if r.Fault != "" {
		text += ", not used: " + r.Fault
	}
	return text
}

// cite is the number of a source.
func (p *workingPart) cite(source string) int {
	for _, s := range p.Sources {
		if s.Text == source {
			return s.Number
		}
	}
	p.Sources = append(p.Sources, workingSource{len(p.Sources) + 1, source})
	return len(p.Sources)
}

func causeOf(c *working.Cause) workingCause {
	x := workingCause{Kind: c.Kind, Subject: c.Subject, Says: c.Says, Weight: shown.Rounded(c.Weight, 2), Alike: strings.Join(c.Alike, ", ")}
	for _, f := range c.Figures {
		x.Figures = append(x.Figures, f.Name+" "+causeFigure(&f))
	}
	return x
}

// causeFigure is the value of one that a cause stands on: four digits, W as kW.
func causeFigure(f *working.Figure) string {
	value, unit := f.Value, f.Unit
	switch unit {
	case "1":
		unit = ""
	case "W":
		value, unit = value/1e3, " kW"
	default:
		unit = " " + unit
	}
	text := fourDigits(value) + unit
	if f.Stands != 0 {
		text += " (" + shown.Rounded(math.Abs(f.Stands), 1) + " standard uncertainties)"
	}
	return text
}
