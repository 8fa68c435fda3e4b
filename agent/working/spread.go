package working

import (
	"fmt"
	"math"

	"heatreeve/agent/figure"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
)

const (
	byHalfWidth = "half-width / √3: JCGM 100:2008, 4.3.7"
	bySwing     = "half the change as it moves by its uncertainty up and down: JCGM 100:2008, 5.1.3"
	byLaw       = "root of the sum of squares: JCGM 100:2008, 5.1.2"
	byReadings  = "half the mean square of differences of successive readings"
)

// shares are the contributions to an uncertainty while it is being written.
type shares struct {
	lasting, random []term
	pair            []term // what the thermometers of a pair have in common, before √r
}

// streamSpread writes the uncertainty of a stream.
func (p *page) streamSpread() {
	p.begin("Uncertainty")
	defer p.end()
	var s shares
	for i := range p.Basis.Inputs {
		switch in := &p.Basis.Inputs[i]; {
		case in.By == 0 || in.Accuracy == 0 && in.Coarse == 0 && in.Scatter == 0:
		case p.slight(in):
			p.say(fmt.Sprintf("share of the %s: less than 0.1 %% of the uncertainty", in.Name))
		default:
			p.input(in, &s)
		}
	}
	f, b := &p.Basis.Figure, p.Basis.Stream
	if len(s.pair) > 0 {
		r := named("pair", b.Pair)
		s.lasting = append(s.lasting, p.share("s12", "what the matched pair has in common", sum(s.pair).times(r.root()), f.Share[loads.PartPair]))
	}
	p.ofProperty(&s, loads.PartCp, "cp", "specific heat", p.at["stream"], b.ByFlow)
	if p.load.Stream.CalibratedAt > 0 { // the flow goes with its root
		p.ofProperty(&s, loads.PartDensity, "ρ", "density", p.at["stream"].times(number(0.5)), b.ByFlow/2)
	} else {
		p.ofProperty(&s, loads.PartDensity, "ρ", "density", p.at["stream"], b.ByFlow)
	}
	p.ofProperty(&s, loads.PartStrength, "w", "specific heat and density by the strength of the mixture", p.at["stream"], b.ByFlow)
	if stored, ok := p.at["stored"]; ok {
		share := stored.times(number(0.1)).over(number(3).root())
		if f.Share[loads.PartContent]*p.Basis.Stream.Rise < 0 {
			share = negative(share)
		}
		s.lasting = append(s.lasting, p.share("sC", "share of the heat capacity, known within 10 %", share, f.Share[loads.PartContent]))
		u := p.given("uT", "uncertainty of the mean rise", b.RiseError, "K/s", place(b.RiseError, coarse+2), "scatter about the lines, and steps of the numbers")
		C := p.load.Stream.Stored
		s.random = append(s.random, p.share("rC", "random share of the mean rise", p.at["C"].times(u), C*b.RiseError))
	}
	p.total(&s)
}

// slight tells whether an input's shares do not show in four digits of the uncertainty.
func (p *page) slight(in *loads.Input) bool {
	u := math.Sqrt(in.Accuracy*in.Accuracy + in.Coarse + in.Scatter)
	return math.Abs(in.By)*u < 1e-3*p.Basis.Figure.Uncertainty
}

// negative is a term with the other sign.
func negative(t term) term {
	n := term{"-1", "-1", -1, asOne}
	return n.times(t)
}

// share writes a contribution to the uncertainty of the duty, W, in kW.
func (p *page) share(symbol, words string, f term, w float64) term {
	return p.worked(symbol, words, f, w/1e3, "kW", place(w/1e3, coarse+1), "")
}

// input writes the shares of one input.
func (p *page) input(in *loads.Input, s *shares) {
	q := p.quantity(in)
	f := &p.Basis.Figure
	by := in.By * q.size / 1e3 // kW for a unit
	c := p.sensitivity(in, q, by)
	if in.Accuracy > 0 || in.Coarse > 0 {
		u := p.standard(in, q)
		pair := 0.0
		if in.Part == loads.PartInlet || in.Part == loads.PartOutlet {
			pair = p.Basis.Stream.Pair
		}
		lasting := u
		if pair > 0 {
			s.pair = append(s.pair, c.times(u))
			lasting = number(1).minus(named("pair", pair)).times(u.squared())
		}
		if in.Coarse > 0 {
			lasting = p.coarse(in, q, lasting, pair > 0)
		}
		if pair > 0 || in.Coarse > 0 {
			lasting = lasting.root()
		}
		w := in.By * lastingOf(in, pair)
		s.lasting = append(s.lasting, p.share("s"+q.symbol, "share of the "+in.Name, c.times(lasting), w))
	}
	if in.Scatter > 0 && f.Random > 0 {
		sd := math.Sqrt(in.Scatter) / q.size
		r := p.given("z"+q.symbol, in.Name+", random, of one reading", sd, q.unit, place(sd, coarse+2), byReadings)
		s.random = append(s.random, p.share("r"+q.symbol, "random share of the "+in.Name, c.times(r), in.By*sd*q.size))
	}
}

// lastingOf is the standard uncertainty of what lasts, as the engine has it.
func lastingOf(in *loads.Input, shared float64) float64 {
	return math.Sqrt((1-shared)*in.Accuracy*in.Accuracy + in.Coarse)
}

// sensitivity writes what a unit of the input does to the duty, kW.
func (p *page) sensitivity(in *loads.Input, q quantity, by float64) term {
	unit := "kW/(" + q.unit + ")"
	switch q.unit {
	case "K", "kPa":
		unit = "kW/" + q.unit
	case "kW", "1":
		unit = map[string]string{"kW": "1", "1": "kW"}[q.unit]
	}
	words := "change of the duty by the " + in.Name
	if in.Name == "flow" {
		return p.worked("c"+q.symbol, words, p.at["stream"].over(p.at["flow"]), by, unit, place(by, fine), "")
	}
	return p.given("c"+q.symbol, words, by, unit, place(by, coarse+2), bySwing)
}

// standard writes the standard uncertainty of an input by its accuracy.
func (p *page) standard(in *loads.Input, q quantity) term {
	u := in.Accuracy / q.size
	tag := &p.Site.Tags[in.Source.Tag]
	half := p.halfWidth(in, tag.Accuracy, q)
	return p.worked("u"+q.symbol, in.Name+", by its accuracy", half.over(number(3).root()), u, q.unit, place(u, coarse+2), byHalfWidth)
}

// halfWidth is how far the instrument may be off, Abs + Rel·|x − Zero|.
func (p *page) halfWidth(in *loads.Input, a site.Accuracy, q quantity) term {
	var parts []term
	counted := in.Name == "flow" && p.Basis.Count.Counted
	if a.Abs > 0 && !counted {
		parts = append(parts, number(a.Abs/q.size))
	}
	if a.Rel > 0 {
		parts = append(parts, number(a.Rel).times(p.distance(in, a.Zero/q.size, counted)))
	}
	if len(parts) == 0 {
		return number(0)
	}
	return sum(parts)
}

// distance is that of the reading from where its instrument reads nothing.
func (p *page) distance(in *loads.Input, zero float64, counted bool) term {
	x := p.at[in.Name]
	if in.Name == "inlet" && p.load.Stream.Hold > 0 { // the reading, and not what leaves
		x = p.at["reading"]
	}
	switch {
	case zero == 0 || counted:
		if x.value < 0 {
			return negative(x)
		}
		return x
	case x.value < zero:
		return number(zero).minus(x)
	}
	return x.minus(number(zero))
}

// coarse adds what step and dead band of the numbers leave open to a variance by the rest.
func (p *page) coarse(in *loads.Input, q quantity, u term, isVariance bool) term {
	tag := &p.Site.Tags[in.Source.Tag]
	if !isVariance {
		u = u.squared()
	}
	if tag.Deadband > 0 {
		u = u.plus(named("deadband", tag.Deadband/q.size).squared().over(number(3)))
	}
	if tag.Resolution > 0 {
		u = u.plus(named("resolution", tag.Resolution/q.size).squared().over(number(12)))
	}
	return u
}

// ofProperty writes the share that the fluid's own figures have of what goes with them, W.
func (p *page) ofProperty(s *shares, part loads.Part, symbol, words string, of term, w float64) {
	share := p.Basis.Figure.Share[part]
	if share == 0 || w == 0 {
		return
	}
	u := p.given("u"+symbol, "relative uncertainty of the "+words, share/w, "1", place(share/w, coarse+2), p.citation)
	s.lasting = append(s.lasting, p.share("s"+symbol, "share of the "+words, of.times(u), share))
}

// total writes what the shares come to.
func (p *page) total(s *shares) {
	f := &p.Basis.Figure
	all := squares(s.lasting)
	switch len(s.random) {
	case 0:
	case 1:
		all = append(all, s.random[0].squared())
	default:
		all = append(all, p.share("sr", "all random shares", sum(squares(s.random)).root(), f.Random).squared())
	}
	if len(all) == 0 {
		return
	}
	u := p.worked(figure.Uncertainty.Symbol, figure.Uncertainty.Words, sum(all).root(), f.Uncertainty/1e3, "kW", place(f.Uncertainty/1e3, coarse), byLaw)
	p.worked("U", "expanded, with the coverage factor 2", number(CoverageFactor).times(u), CoverageFactor*f.Uncertainty/1e3, "kW", place(f.Uncertainty/1e3, coarse), "JCGM 100:2008, 6.3.3")
	p.parts()
}

func squares(terms []term) []term {
	all := make([]term, len(terms))
	for i, t := range terms {
		all[i] = t.squared()
	}
	return all
}
