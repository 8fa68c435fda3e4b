package working

import (
	"math"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/thermo/unit"
)

// raw writes what the raw signals were that the readings were made of, so that they can be
// held against a meter at the terminals. The history keeps the quantity alone, which leads
// back to its signal; one below its cut-off does not.
func (p *page) raw() {
	p.begin("Raw signals, worked back")
	for i := range p.Basis.Inputs {
		in := &p.Basis.Inputs[i]
		if in.Source.Tag < 0 || in.Held.At == 0 || math.IsNaN(in.Held.Value) {
			continue
		}
		tag := &p.Site.Tags[in.Source.Tag]
		if s := tag.Signal; s != nil && !(s.Root && in.Held.Value <= 0) {
			p.signal(in, tag)
		}
	}
	p.end()
}

func (p *page) signal(in *loads.Input, tag *site.Tag) {
	q, s := p.quantity(in), tag.Signal
	x := shown(q.symbol+"'", digits(payload(tag, in.Held.Value)))
	switch {
	case s.Loop:
		p.back("I"+q.symbol, "current of the "+in.Name, number(4).plus(number(16).times(ofSpan(x, tag))), tag.Numbers, "NAMUR NE 43")
	case s.Root:
		p.back("Δp"+q.symbol, "differential pressure of the "+in.Name, number(s.FullAt).times(ofSpan(x, tag)), tag.Numbers, "square root of pressure")
	default:
		p.back("R"+q.symbol, "resistance of the "+in.Name, resistance(s, celsius(x, tag)), tag.Numbers, "IEC 60751")
	}
}

func (p *page) back(symbol, words string, f term, u unit.Unit, source string) {
	p.worked(symbol, words, f, f.value, u.Symbol, place(f.value, fine), source)
}

// ofSpan is the part of its span that a reading is, and of a root the square of that.
func ofSpan(x term, tag *site.Tag) term {
	most := payload(tag, tag.Max)
	if tag.Signal.Root {
		return x.squared().over(number(most).squared())
	}
	least := payload(tag, tag.Min)
	if least != 0 {
		x = x.minus(number(least))
	}
	return x.over(number(most - least))
}

// celsius is a temperature of the tag in °C.
func celsius(x term, tag *site.Tag) term {
	x = scaled(x, tag.Scale)
	switch offset := tag.Offset - 273.15; {
	case offset > 0:
		return x.plus(number(offset))
	case offset < 0:
		return x.minus(number(-offset))
	}
	return x
}

// resistance is that of a platinum thermometer at so many °C, with its leads: the equation
// of Callendar and Van Dusen with the coefficients of IEC 60751:2008.
func resistance(s *site.Signal, t term) term {
	w := number(1).plus(number(3.9083e-3).times(t)).minus(number(5.775e-7).times(t.squared()))
	if t.value < 0 {
		w = w.minus(number(4.183e-6).times(t.minus(number(100))).times(t.squared()).times(t).over(number(1e6))) // a number has 12 decimals
	}
	f := number(s.R0).times(w)
	if s.Lead > 0 {
		f = f.plus(number(s.Lead))
	}
	return f
}
