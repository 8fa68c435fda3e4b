package agent

import (
	"heatreeve/agent/design/expect"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
)

// expectationOf is what is expected of a load by its design; nil where it has none, and where an
// exchanger tells.
func expectationOf(s *site.Site, d *site.Design) expect.Expectation {
	switch {
	case d.Duty != 0:
		return expect.Fixed{Duty: d.Duty, Uncertainty: d.Uncertainty * d.Duty}
	case d.Table != nil:
		return tableOf(s, d)
	case d.Week != nil:
		return expect.Week{Duty: *d.Week, Uncertainty: d.Uncertainty}
	case d.Baseline != nil:
		return baselineOf(s, d.Baseline)
	}
	return nil
}

func tableOf(s *site.Site, d *site.Design) expect.Table {
	t := expect.Table{Duty: d.Table.Duty, Uncertainty: d.Uncertainty}
	for k, tag := range d.Table.Against {
		t.Axes = append(t.Axes, expect.Axis{Scale: scaleOf(s, tag), Driver: k, At: d.Table.At[k]})
	}
	return t
}

func baselineOf(s *site.Site, b *site.Baseline) expect.Baseline {
	x := expect.Baseline{
		Duty: b.Duty, Correlation: b.Correlation, Residual: b.Residual, Lag: b.Lag,
		Samples: b.Samples, Cell: b.Fewest, Span: b.Span.Minutes(),
	}
	for k, t := range b.Terms {
		term := expect.Term{
			Scale: scaleOf(s, t.Tag), Driver: k, Low: t.From, High: t.To, Limit: t.Limit,
			Centre: t.Centre, Slope: t.Slope, Error: t.Error,
		}
		switch {
		case t.Below:
			term.Bend = expect.Below
		case t.Above:
			term.Bend = expect.Above
		}
		x.Terms = append(x.Terms, term)
	}
	if b.Hours != nil {
		x.Hours = b.Hours[:]
	}
	return x
}

// scaleOf is how people write the readings of a tag.
func scaleOf(s *site.Site, tag int) expect.Scale {
	t := &s.Tags[tag]
	x := expect.Scale{Tag: t.Name, Unit: t.Unit.Symbol, Factor: t.Unit.Factor, Offset: t.Unit.Offset}
	if t.Unit.Gauge {
		x.Offset += s.Barometer
	}
	return x
}

// driversOf is what the engine tells the means of for what is expected of a load.
func driversOf(d *site.Design) (all []loads.Source) {
	for _, tag := range d.Drivers() {
		all = append(all, loads.FromTag(tag))
	}
	return all
}
