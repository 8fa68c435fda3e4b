package working

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"heatreeve/agent/design/cause"
	"heatreeve/agent/loads"
	"heatreeve/ingest/quality"
	"heatreeve/thermo"
)

// Cause is one thing that may be behind a deviation.
type Cause struct {
	Kind    string   `json:"kind"`
	Subject string   `json:"subject,omitempty"`
	Weight  float64  `json:"weight"` // 0 to 1
	Says    string   `json:"says"`
	Figures []Figure `json:"figures,omitempty"`
	Alike   []string `json:"alike,omitempty"` // kinds that the evidence cannot tell from it
}

// Figure is one that a cause stands on.
type Figure struct {
	Name   string  `json:"name"`
	Value  float64 `json:"value"`
	Unit   string  `json:"unit"` // SI, "1" of a ratio
	Stands float64 `json:"standard_uncertainties,omitempty"`
}

// mostCauses is how many are told.
const mostCauses = 6

// CausesTitle is that of the section whose lines tell [Working.Causes].
const CausesTitle = "What to look at first"

// causes writes what to look at first. Rest is nothing to look at.
func (p *page) causes() {
	if p.Basis.Figure.Idle {
		return
	}
	all := cause.Rank(p.evidence())
	p.begin(CausesTitle)
	defer p.end()
	for i, c := range all[:min(len(all), mostCauses)] {
		x := Cause{Kind: string(c.Kind), Subject: c.Subject, Weight: c.Weight, Says: c.Says}
		for _, k := range c.Alike {
			x.Alike = append(x.Alike, string(k))
		}
		for _, f := range c.Figures {
			x.Figures = append(x.Figures, Figure(f))
		}
		p.Causes = append(p.Causes, x)
		p.say(told(i+1, &x))
		if len(x.Figures) > 0 {
			p.say("by " + figures(x.Figures))
		}
	}
}

// told is the line of a cause.
func told(rank int, c *Cause) string {
	text := fmt.Sprintf("%d. %s", rank, c.Kind)
	if c.Subject != "" {
		text += ", " + c.Subject
	}
	text += fmt.Sprintf(" (weight %s): %s", fixed(c.Weight, 2), c.Says)
	if len(c.Alike) > 0 {
		text += "; the figures do not tell it from " + strings.Join(c.Alike, ", ")
	}
	return text
}

// figures are those that a cause stands on, in a line.
func figures(all []Figure) string {
	var parts []string
	for _, f := range all {
		x, unit := f.Value, f.Unit
		switch {
		case unit == "1":
			unit = ""
		case unit == "W":
			x, unit = x/1e3, "kW"
		}
		text := f.Name + " " + fixed(x, place(x, 4))
		if unit != "" {
			text += " " + unit
		}
		if f.Stands != 0 {
			text += fmt.Sprintf(" (%s standard uncertainties)", fixed(math.Abs(f.Stands), max(0, place(f.Stands, 2))))
		}
		parts = append(parts, text)
	}
	return strings.Join(parts, ", ")
}

// evidence adds to that of the minutes before what the figure itself tells.
func (p *page) evidence() cause.Evidence {
	e, f := p.Evidence, &p.Basis.Figure
	known := func(m cause.Mark) bool { return m.Tag == f.By }
	if f.Mark != quality.None && f.By != "" && !slices.ContainsFunc(e.Marks, known) {
		e.Marks = append(e.Marks[:len(e.Marks):len(e.Marks)], Doubted(f.By, f.Mark))
	}
	near := func(k cause.Kind) {
		e.Margins = append(e.Margins[:len(e.Margins):len(e.Margins)], cause.Margin{Kind: k})
	}
	_, fluid := p.load.Fluid()
	switch {
	case f.Fault == loads.Saturation && fluid.Phase() == thermo.Liquid:
		near(cause.NearBoiling)
	case f.Fault == loads.Saturation:
		near(cause.NearDewPoint)
	case f.Measured() && strings.HasPrefix(f.Note, string(cause.NearFreezing)):
		near(cause.NearFreezing)
	}
	return e
}

// Doubted is what an uncertain reading of a tag tells the causes.
func Doubted(tag string, m quality.Mark) cause.Mark {
	return cause.Mark{
		Tag: tag, Reason: m.String(), Order: m == quality.WrongOrder,
		Tested: m == quality.Disagrees || m == quality.NotZero,
	}
}
