package page

import (
	"fmt"
	"math"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/shown"
	"heatreeve/agent/view"
)

// coverageFactor is that of every ± on a page: about 95 % (JCGM 100:2008, 6.3.3).
const coverageFactor = 2

// now is what a band shows of a load at one beat: texts in the units of the reader.
type now struct {
	Verdict      string
	Duty, Spread string // of the duty, and its expanded uncertainty; "–" where there is none
	Expected     string // "" where nothing is expected
	Allowed      string // how far around what is expected; "" likewise
	Note         string // why there is no figure, or what to bear in mind with it
	figure       loads.Figure
	verdict      design.Verdict
}

// nowOf is load i of a snapshot at an instant.
func nowOf(s *view.Snapshot, i int, at int64, u shown.Units) now {
	l := &s.Loads[i]
	f, verdict := s.Current(i, at)
	n := now{figure: f, verdict: verdict, Verdict: verdict.String(), Duty: shown.None, Note: f.Beside()}
	switch {
	case f.Measured() && f.Idle:
		n.Duty = "0"
	case f.Measured():
		n.Duty, n.Spread = shown.Figure(u.Duty, f.Duty, coverageFactor*f.Uncertainty)
	}
	if l.Design != 0 {
		n.Expected, n.Allowed = shown.Figure(u.Duty, l.Design, math.Abs(l.Allow*l.Design))
	}
	return n
}

// band is a load on the sheet.
type band struct {
	now
	Index  int  // in the site file
	Hidden bool // the filter leaves it out, until it is otherwise
	Load   string
	Href   string
	Serves string // "gives" or "takes"
	Unit   string
	Line   line
}

// bandOf is the band of load i.
func (p *Page) bandOf(f *frame, s *view.Snapshot, i int) band {
	n := nowOf(s, i, p.Now().UnixNano(), f.Units)
	return band{
		now: n, Index: i, Load: s.Loads[i].Name, Href: f.LoadLink(s.Loads[i].Name), Serves: p.serves(i),
		Unit: shown.Label(f.Units.Duty), Line: lineOf(&n, &s.Loads[i], f.Units),
	}
}

// serves is which way a load's duty is positive.
func (p *Page) serves(i int) string {
	l := &p.Site.Loads[i]
	gives := l.Stream != nil && l.Stream.Gives || l.Vessel != nil && l.Vessel.Gives
	if gives {
		return "gives"
	}
	return "takes"
}

// Said is the band in words, for those who hear it.
func (b *band) Said() string {
	if !b.figure.Measured() {
		return "no duty"
	}
	text := b.Duty
	if b.Spread != "" {
		text += " ± " + b.Spread
	}
	text += " " + b.Unit
	if b.Expected != "" {
		text += fmt.Sprintf(", expected %s, allowed ± %s", b.Expected, b.Allowed)
	}
	return text
}

// attention orders bands: the less, the more it asks for.
func (b *band) attention() int {
	switch b.verdict {
	case design.Short, design.Over:
		return 0
	case design.Blind:
		return 1
	case design.Undecided:
		return 3
	case design.Idle:
		return 5
	}
	if b.Note != "" {
		return 2
	}
	return 4
}
