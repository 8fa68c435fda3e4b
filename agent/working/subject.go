package working

import (
	"fmt"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/design/cause"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/ingest/quality"
)

// Subject is what a working is of.
type Subject struct {
	Site    *site.Site
	Load    int // index into Site.Loads
	Basis   loads.Basis
	Grounds design.Grounds // of the verdict, by the minutes before
	// Evidence is what is known of these minutes, for what to look at first.
	Evidence cause.Evidence
	// Exchanger is that by which the duty is expected; nil where it is not.
	Exchanger *Exchanger
	// Past is that only some minutes before were put through once more, so that what goes back
	// further, the sums of small deviations, is not known.
	Past  bool
	Notes []string
}

// page is the working of a subject as it is written.
type page struct {
	sheet
	*Subject
	load     *site.HeatLoad
	fluid    string // by its name in the file, and what it is
	citation string
	at       map[string]term // what formulas write for each input
}

// Of writes the working of a figure.
func Of(x Subject) *Working {
	f := &x.Basis.Figure
	p := &page{
		Subject: &x, load: &x.Site.Loads[x.Load], at: make(map[string]term),
		sheet: sheet{&Working{
			Site: x.Site.Name, Load: x.Site.Loads[x.Load].Name, At: time.Unix(0, f.At).In(x.Site.Zone),
			Span: float64(x.Basis.Grid) / 1e9, Factor: CoverageFactor, Idle: f.Idle, Verdict: verdict(&x).String(),
		}},
	}
	name, fluid := p.load.Fluid()
	if p.fluid, p.citation = name, fluid.Source(); fluid.Name() != name {
		p.fluid += ", which is " + fluid.Name()
	}
	p.write()
	for _, n := range x.Notes {
		p.note(n)
	}
	return p.Working
}

func (p *page) write() {
	f := &p.Basis.Figure
	if !f.Measured() {
		p.Fault = f.Fault.String()
		p.faulty()
		p.readings("Last readings")
		p.raw()
		p.verdict()
		p.causes()
		return
	}
	duty, u := f.Duty, f.Uncertainty
	p.Duty, p.Uncertainty = &duty, &u
	p.readings("Readings")
	p.raw()
	p.conversions()
	switch {
	case p.Basis.Vessel != nil:
		p.vessel()
	case p.Basis.Stream != nil:
		p.counter()
		p.stream()
	default:
		p.counter()
		p.idle()
	}
	p.quality()
	p.note(f.Note)
	p.verdict()
	p.causes()
}

// quality tells how far the readings can be relied on.
func (p *page) quality() {
	f := &p.Basis.Figure
	p.Quality = f.Mark.Quality().String()
	if f.Mark == quality.None {
		return
	}
	p.Reason, p.By = f.Mark.String(), f.By
	p.note(fmt.Sprintf("quality %s by tag %q: %s", p.Quality, p.By, p.Reason))
}

// title is one that names the fluid.
func (p *page) title(what string) string { return what + ": " + p.fluid }

// verdict is that of the grounds, unless there is none at this instant.
func verdict(x *Subject) design.Verdict {
	switch f := &x.Basis.Figure; {
	case !f.Measured():
		return design.Blind
	case f.Idle:
		return design.Idle
	}
	return x.Grounds.Verdict
}
