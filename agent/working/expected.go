package working

import (
	"fmt"
	"math"

	"heatreeve/agent/design/expect"
	"heatreeve/agent/figure"
)

// expected writes what is expected of the last minute, and how.
func (p *page) expected() {
	g := &p.Grounds
	x := &g.Today
	p.begin("Expected duty")
	defer p.end()
	if !x.Known {
		p.say("nothing is known of what is expected: " + x.Why)
		return
	}
	var duty term
	var relative float64 // uncertainty of the site file, as a fraction
	ok := false
	if p.Exchanger != nil {
		duty, ok = p.clean(p.Exchanger)
	}
	switch of := g.Target.Expect.(type) {
	case nil:
		if !ok {
			duty = p.plainly()
		}
	case expect.Fixed:
		duty = p.given(figure.Expected.Symbol, figure.Expected.By("by design"), x.Duty/1e3, "kW", place(x.Duty/1e3, 10), "site file")
	case expect.Table:
		duty, relative = p.table(&of), of.Uncertainty
	case expect.Week:
		duty, relative = p.week(), of.Uncertainty
	case expect.Baseline:
		duty = p.baseline(&of)
	default:
		duty = p.plainly()
	}
	p.at["expected"] = duty
	p.doubt(duty, relative)
}

// plainly writes what is expected without how.
func (p *page) plainly() term {
	q := p.Grounds.Today.Duty / 1e3
	return p.given(figure.Expected.Symbol, figure.Expected.By("at the conditions of the last minute"), q, "kW", place(q, 10), "")
}

// doubt writes how unsure the expectation is.
func (p *page) doubt(duty term, relative float64) {
	x := &p.Grounds.Today
	switch {
	case x.Lasting > 0 && relative > 0 && duty.value > 0:
		p.worked(figure.ExpectedUncertainty.Symbol, figure.ExpectedUncertainty.Words, named("uncertainty", relative).times(duty), x.Lasting/1e3, "kW", place(x.Lasting/1e3, coarse), "")
	case x.Lasting > 0:
		p.given(figure.ExpectedUncertainty.Symbol, figure.ExpectedUncertainty.Words, x.Lasting/1e3, "kW", place(x.Lasting/1e3, coarse), "")
	}
	if x.Random > 0 {
		r := math.Sqrt(x.Random) / 1e3
		p.given("rd", "and by what changes from minute to minute", r, "kW", place(r, coarse), "")
	}
	if x.Joint {
		p.say("errors of the instruments that last are in both the measured and the expected duty, and are taken together")
	}
}

// scale is how a driver is written, in its tag's unit.
type scale struct{ *expect.Scale }

func (s scale) factor() float64 {
	if s.Factor == 0 {
		return 1
	}
	return s.Factor
}

// point is a place on the scale, and distance how far two are apart.
func (s scale) point(x float64) float64    { return (x - s.Offset) / s.factor() }
func (s scale) distance(x float64) float64 { return x / s.factor() }

// driver writes the mean of a driver over the last minute.
func (p *page) driver(symbol string, s scale, index int) term {
	x := s.point(p.Grounds.By.Drivers[index])
	return p.given(symbol, fmt.Sprintf("tag %q, mean of the last minute", s.Tag), x, s.Unit, place(x, fine), "")
}

// table writes the interpolation between the places about the conditions.
func (p *page) table(t *expect.Table) term {
	var parts []term
	var at []int
	for k := range t.Axes {
		part, i := p.onAxis(t, k)
		parts, at = append(parts, part), append(at, i)
	}
	if len(t.Axes) == 1 {
		return p.between(figure.Expected.Symbol, figure.Expected.Words, p.corner("Qa", t.Duty[at[0]]), p.corner("Qb", t.Duty[at[0]+1]), parts[0], p.Grounds.Today.Duty)
	}
	n, v := len(t.Axes[1].At), parts[1]
	row := func(i int, symbol string) term {
		a, b := t.Duty[i*n+at[1]], t.Duty[i*n+at[1]+1]
		return p.between(symbol, "between these", p.corner(symbol+"1", a), p.corner(symbol+"2", b), v, a+(b-a)*p.part(t, 1, at[1]))
	}
	a, b := row(at[0], "Qa"), row(at[0]+1, "Qb")
	return p.between(figure.Expected.Symbol, figure.Expected.Words, a, b, parts[0], p.Grounds.Today.Duty)
}

func (p *page) corner(symbol string, w float64) term {
	return p.given(symbol, "duty of the table", w/1e3, "kW", place(w/1e3, 10), "site file")
}

// between writes a duty, W, that is a part of the way from one to the next.
func (p *page) between(symbol, words string, a, b, part term, w float64) term {
	return p.worked(symbol, words, a.plus(b.minus(a).times(part)), w/1e3, "kW", place(w/1e3, fine), "")
}

// onAxis writes which part of the way between two places of an axis the driver has gone, and
// returns the index of the lower one.
func (p *page) onAxis(t *expect.Table, k int) (part term, i int) {
	a := &t.Axes[k]
	s, n := scale{&a.Scale}, fmt.Sprint(k+1)
	x := p.driver("x"+n, s, a.Driver)
	for i < len(a.At)-2 && p.Grounds.By.Drivers[a.Driver] >= a.At[i+1] {
		i++
	}
	lo, hi := s.point(a.At[i]), s.point(a.At[i+1])
	below := p.given("a"+n, "place below it in the table", lo, s.Unit, place(lo, 10), "site file")
	above := p.given("b"+n, "place above it", hi, s.Unit, place(hi, 10), "site file")
	w := p.part(t, k, i)
	return p.worked("w"+n, "part of the way", x.minus(below).over(above.minus(below)), w, "1", place(w, fine), ""), i
}

// part is how far the driver of an axis is from its place i to the next.
func (p *page) part(t *expect.Table, k, i int) float64 {
	a := &t.Axes[k]
	return (p.Grounds.By.Drivers[a.Driver] - a.At[i]) / (a.At[i+1] - a.At[i])
}

var weekdays = [...]string{"Monday", "Tuesday", "Wednesday", "Thursday", "Friday", "Saturday", "Sunday"}

// hour names an hour of the week.
func hour(h int) string { return fmt.Sprintf("%s from %02d:00 on", weekdays[h/24], h%24) }

func (p *page) week() term {
	q := p.Grounds.Today.Duty / 1e3
	return p.given(figure.Expected.Symbol, figure.Expected.By("that of the hour of the week, ")+hour(p.Grounds.By.Hour), q, "kW", place(q, 10), "site file")
}

// baseline writes the learned regression with its coefficients.
func (p *page) baseline(b *expect.Baseline) term {
	source := fmt.Sprintf("site file, learned from %d samples", b.Samples)
	q := p.given("Q0", "duty at the centres", b.Duty/1e3, "kW", place(b.Duty/1e3, 10), source)
	if len(b.Hours) > 0 {
		h := b.Hours[p.Grounds.By.Hour] / 1e3
		q = q.plus(p.given("Qh", "more in the hour of the week, "+hour(p.Grounds.By.Hour), h, "kW", place(h, 10), source))
	}
	for k := range b.Terms {
		q = q.plus(p.regressor(&b.Terms[k], fmt.Sprint(k+1), source))
	}
	w := p.Grounds.Today.Duty / 1e3
	return p.worked(figure.Expected.Symbol, figure.Expected.Words, q, w, "kW", place(w, fine), "N. R. Draper and H. Smith, Applied Regression Analysis, 3rd ed., 1998")
}

// regressor writes what one driver adds.
func (p *page) regressor(t *expect.Term, n, source string) term {
	s := scale{&t.Scale}
	z := p.driver("x"+n, s, t.Driver)
	x, centre := p.Grounds.By.Drivers[t.Driver], s.point(t.Centre)
	if t.Bend != expect.Straight {
		limit := s.point(t.Limit)
		l := p.given("l"+n, "limit beyond which it counts", limit, s.Unit, place(limit, 10), source)
		beyond, f := s.distance(x-t.Limit), z.minus(l)
		if t.Bend == expect.Below {
			beyond, f = s.distance(t.Limit-x), l.minus(z)
		}
		if beyond > 0 {
			z = p.worked("z"+n, "by so much", f, beyond, s.Unit, place(beyond, fine), "")
		} else {
			z = p.given("z"+n, "by so much: it is on the other side", 0, s.Unit, 0, "")
		}
		centre = s.distance(t.Centre)
	}
	c := p.given("c"+n, "centre of what was learned", centre, s.Unit, place(centre, 10), source)
	slope := t.Slope * s.factor() / 1e3
	k := p.given("k"+n, "slope", slope, "kW/"+s.Unit, place(slope, 10), source)
	return k.times(z.minus(c))
}
