package working

import (
	"fmt"
	"math"
	"strconv"
	"time"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
)

// readings writes what was heard of each tag, in the unit of the tag.
func (p *page) readings(title string) {
	p.begin(title)
	for i := range p.Basis.Inputs {
		if in := &p.Basis.Inputs[i]; in.Source.Tag >= 0 && in.Held.At != 0 {
			p.reading(in)
		}
	}
	p.end()
}

func (p *page) reading(in *loads.Input) {
	tag, q := &p.Site.Tags[in.Source.Tag], p.quantity(in)
	l := Line{Symbol: q.symbol + "'", Words: p.read(in.Name, tag), Value: payload(tag, in.Held.Value), Reading: p.sample(in.Held, in.Fault)}
	if tag.Counter != nil {
		l.Symbol = countSymbol(tag) + "'"
	}
	if in.Aside {
		l.Words += ", from before what has been set aside"
	}
	if math.IsNaN(l.Value) {
		l.Words += ", without a number"
	} else {
		l.Shown, l.Unit = digits(l.Value), unitOf(tag)
	}
	p.add(l)
	if in.Alive.At != 0 {
		p.add(Line{Words: "sign of life of its source", Reading: p.sample(in.Alive, loads.NoFault)})
	}
}

// unitOf is that of the tag's numbers: of a register that counts pulses these, and of a raw
// signal the quantity that it was turned into.
func unitOf(t *site.Tag) string {
	if t.Counter != nil {
		return t.Numbers.Symbol
	}
	return t.Unit.Symbol
}

// digits is x in full.
func digits(x float64) string { return strconv.FormatFloat(x, 'f', -1, 64) }

// countSymbol is that of the newest count, or of what a message counts.
func countSymbol(t *site.Tag) string {
	if t.Counter.Each {
		return "N"
	}
	return "N2"
}

// read names an input, and the raw signal that its tag's numbers were made of.
func (p *page) read(name string, tag *site.Tag) string {
	if tag.Signal == nil {
		return name
	}
	return name + ", by " + tag.Signal.Word
}

func (p *page) sample(r loads.Reading, why loads.Fault) *Sample {
	s := &Sample{
		Tag: p.Site.Tags[r.Tag].Name, At: time.Unix(0, r.At).In(p.Site.Zone),
		Age: float64(p.Basis.Figure.At-r.At) / 1e9, Quality: r.Mark.Quality().String(),
	}
	if r.Mark != 0 {
		s.Reason = r.Mark.String()
	}
	if why != loads.NoFault {
		s.Fault = why.String()
	}
	return s
}

// payload is the number in the tag's unit that became si: the shortest that does so to the
// last bit, or where none does, with twelve digits.
func payload(t *site.Tag, si float64) float64 {
	x := (si - t.Offset) / t.Scale
	for n := range 13 {
		y := parse(strconv.FormatFloat(x, 'f', n, 64))
		if t.Scale*y+t.Offset == si {
			return y
		}
	}
	return parse(strconv.FormatFloat(x, 'g', 12, 64))
}

// conversions writes how each reading becomes SI, and the constants.
func (p *page) conversions() {
	p.begin("In SI units")
	for i := range p.Basis.Inputs {
		in := &p.Basis.Inputs[i]
		switch {
		case in.Name == "flow" && p.Basis.Count.Counted:
		case p.Basis.Figure.Idle && p.Basis.Stream == nil && p.Basis.Vessel == nil && in.Name != "flow": // not looked at
		case in.Source.Tag < 0:
			q := p.quantity(in)
			x := p.value(in)
			p.at[in.Name] = p.given(q.symbol, q.words, x, q.unit, place(x, 10), "constant of the site file")
		default:
			p.at[in.Name] = p.conversion(in)
		}
	}
	if in, ok := p.at["pressure"]; ok {
		if _, other := p.at["outlet pressure"]; !other && p.load.Stream != nil {
			p.at["outlet pressure"] = in
		}
	}
	p.end()
}

func (p *page) conversion(in *loads.Input) term {
	tag, q := &p.Site.Tags[in.Source.Tag], p.quantity(in)
	return p.converted(q, tag, in.Held.Value, place(p.value(in), fine+2))
}

// converted writes a number of a tag in SI.
func (p *page) converted(q quantity, tag *site.Tag, si float64, decimals int) term {
	x := si / q.size
	if tag.Scale == q.size && tag.Offset == 0 {
		return p.given(q.symbol, q.words, x, q.unit, decimals, "as it is read")
	}
	return p.worked(q.symbol, q.words, p.convert(tag, q, si), x, q.unit, decimals, "")
}

// convert is the formula from the number of a tag to SI.
func (p *page) convert(tag *site.Tag, q quantity, si float64) term {
	n := payload(tag, si)
	f := scaled(shown(q.symbol+"'", digits(n)), tag.Scale/q.size)
	offset := tag.Offset / q.size
	switch {
	case tag.Unit.Gauge:
		return f.plus(named("barometer", offset))
	case offset < 0:
		return f.minus(number(-offset))
	case offset > 0:
		return f.plus(number(offset))
	}
	return f
}

// scaled is a term times a factor, or over its inverse where that is the rounder number.
func scaled(t term, factor float64) term {
	if factor == 1 {
		return t
	}
	if inverse := short(1 / factor); len(inverse) < len(short(factor)) && math.Abs(parse(inverse)*factor-1) < 1e-12 {
		return t.over(number(1 / factor))
	}
	return t.times(number(factor))
}

// counter writes the two counts that a flow is told by.
func (p *page) counter() {
	c := &p.Basis.Count
	if !c.Counted || !c.Known {
		return
	}
	in := &p.Basis.Inputs[0]
	tag, q := &p.Site.Tags[in.Source.Tag], p.quantity(in)
	of := map[string]string{"m3/s": "m3", "kg/s": "kg", "mol/s": "mol"}[q.unit]
	p.begin("Counter")
	if tag.Counter.Each {
		p.rate(q, c, p.converted(quantity{"N", "counted since the message before", of, 1}, tag, c.Amount, 9))
		return
	}
	if tag.Scale != 1 {
		p.given("N1'", "count before", payload(tag, c.Before), unitOf(tag), mostDecimals, "")
	}
	was := p.converted(quantity{"N1", "count before", of, 1}, tag, c.Before, 9)
	is := p.converted(quantity{"N2", "count", of, 1}, tag, c.Value, 9)
	f := is.minus(was)
	if c.Value < c.Before {
		f = f.plus(named("roll-over", tag.Counter.Modulus))
	}
	p.rate(q, c, p.worked("N", "counted between them", f, c.Amount, of, 9, ""))
}

// rate writes the mean flow of a count.
func (p *page) rate(q quantity, c *loads.Count, amount term) {
	span := p.given("t", fmt.Sprintf("time between, to %s", p.clock(c.To)), float64(c.To-c.From)/1e9, "s", 9, "")
	if !p.Basis.Figure.Idle {
		x := c.Amount / (float64(c.To-c.From) / 1e9)
		p.at["flow"] = p.worked(q.symbol, q.words+", mean", amount.over(span), x, q.unit, place(x, fine+2), "")
	}
}

func (p *page) clock(ns int64) string { return time.Unix(0, ns).In(p.Site.Zone).Format("15:04:05") }

// idle says why there is no flow.
func (p *page) idle() {
	p.begin("Duty")
	defer p.end()
	if p.Basis.Count.Counted {
		p.say("nothing was counted: the load is idle, its duty is 0, and its temperatures are not looked at")
		return
	}
	s := p.load.Stream
	if q := flowSymbols[s.FlowKind]; s.IdleBelow > 0 {
		p.given(q.symbol+"0", "idle at or below", s.IdleBelow, q.unit, place(s.IdleBelow, fine), "idle_below of the site file")
	}
	p.say("nothing to speak of flows: the load is idle, its duty is 0, and its temperatures are not looked at")
}
