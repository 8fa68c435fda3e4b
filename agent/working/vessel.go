package working

import (
	"fmt"
	"math"

	"heatreeve/agent/figure"
	"heatreeve/agent/loads"
	"heatreeve/thermo/unit"
)

// vessel writes the heat equation of a closed content.
func (p *page) vessel() {
	b, v := p.Basis.Vessel, p.load.Vessel
	p.begin(p.title("Content"))
	m := p.mass()
	p.end()
	p.begin("Duty")
	c, law := p.specific()
	C := m.times(c)
	if v.Shell > 0 {
		p.at["Cw"] = p.given("Cw", "heat capacity of the wall", v.Shell/1e3, "kJ/K", place(v.Shell/1e3, fine), "shell of the site file")
		C = C.plus(p.at["Cw"])
	}
	capacity := p.worked("C", "heat capacity of content and wall", C, b.Capacity/1e3, "kJ/K", place(b.Capacity/1e3, fine), law)
	slope := p.slope("dT", "rise of the temperature", b.Rate)
	q := capacity.times(slope)
	if v.Gives {
		q = negative(q)
	}
	symbol, words := figure.Duty.Symbol, figure.Duty.Words
	if p.Basis.Figure.Idle {
		symbol, words = "Qr", "duty by that rise"
	}
	p.at["duty"] = p.worked(symbol, words, q, b.Duty/1e3, "kW", place(b.Duty/1e3, fine), "")
	p.end()
	p.at["capacity"], p.at["slope"], p.at["c"], p.at["m"] = capacity, slope, c, m
	if p.Basis.Figure.Idle {
		p.atRest()
		return
	}
	p.vesselSpread()
}

// mass writes how much there is.
func (p *page) mass() term {
	b := p.Basis.Vessel
	if p.load.Vessel.ContentKind != unit.Volume {
		return p.at["content"]
	}
	words := fmt.Sprintf("density at %s K and %s kPa", fixed(b.Temperature, 4), fixed(b.Pressure/1e3, 4))
	rho := p.given("ρ", words, b.Density, "kg/m3", place(b.Density, fine), p.citation)
	return p.worked("m", "mass of the content", p.at["content"].times(rho), b.Mass, "kg", place(b.Mass, fine), "")
}

// specific writes the specific heat, and returns the law that asks for it.
func (p *page) specific() (c term, law string) {
	b := p.Basis.Vessel
	symbol, words, law := "cp", "specific heat at constant pressure", "at constant pressure the heat is that of the enthalpy"
	if p.load.Vessel.Rigid {
		symbol, words, law = "cv", "specific heat at constant volume", "in a rigid vessel the heat is that of the internal energy"
	}
	words = fmt.Sprintf("%s, at the mean of the span, %s K", words, fixed(b.Mean, 4))
	return p.given(symbol, words, b.Specific/1e3, "kJ/(kg K)", place(b.Specific/1e3, fine), p.citation), law
}

// atRest says why a rate is none.
func (p *page) atRest() {
	p.begin("At rest")
	defer p.end()
	u := p.slopeError()
	r := p.share("u", "what the scatter of the readings makes of it", p.at["capacity"].times(u), p.Basis.Figure.Random)
	least := p.worked("2u", "two of these", number(2).times(r), 2*p.Basis.Figure.Random/1e3, "kW", place(p.Basis.Figure.Random/1e3, coarse), "")
	why := "the duty by that rise is within two of its random uncertainties, " + least.text + " kW, of zero"
	if idle := p.load.Vessel.IdleBelow; idle > 2*p.Basis.Figure.Random {
		p.given("Q0", "idle below", idle/1e3, "kW", place(idle/1e3, fine), "idle_below of the site file")
		why = "the duty by that rise is no more than idle_below"
	}
	p.say(why + ": the content is at rest, and its duty is 0")
}

// slopeError writes the standard error of the slope.
func (p *page) slopeError() term {
	e := p.Basis.Vessel.Rate.Error
	return p.given("udT", "standard error of the rise", e, "K/s", place(e, coarse+2), "scatter about the line, and steps of the numbers")
}

// vesselSpread writes the uncertainty of a vessel.
func (p *page) vesselSpread() {
	p.begin("Uncertainty")
	defer p.end()
	var s shares
	f := &p.Basis.Figure
	content := p.contentShares()
	if len(content) > 0 {
		t := sum(squares(content)).root()
		if f.Share[loads.PartContent] < 0 {
			t = negative(t)
		}
		s.lasting = append(s.lasting, p.share("sm", "share of the content, its wall and its thermometer", t, f.Share[loads.PartContent]))
	}
	if share := f.Share[loads.PartPressure]; share != 0 {
		s.lasting = append(s.lasting, p.given("sp", "share of the pressure, by its accuracy", share/1e3, "kW", place(share/1e3, coarse+1), bySwing))
	}
	p.vesselProperties(&s)
	p.vesselRandom(&s)
	p.total(&s)
}

// contentShares writes what lasts and is about the content.
func (p *page) contentShares() (all []term) {
	b := p.Basis.Vessel
	if b.ByState != 0 {
		all = append(all, p.given("s1", "by the temperature at which density and specific heat are taken", b.ByState/1e3, "kW", place(b.ByState/1e3, coarse+1), bySwing))
	}
	in := &p.Basis.Inputs[2]
	if b.ByAmount != 0 {
		q := p.quantity(in)
		c := p.given("c"+q.symbol, "change of the duty by the content", in.By*q.size/1e3, "kW/"+q.unit, place(in.By*q.size/1e3, coarse+2), "")
		u := p.standard(in, q)
		if in.Coarse > 0 {
			u = p.coarse(in, q, u, false).root()
		}
		all = append(all, p.share("s2", "by the amount of the content", c.times(u), b.ByAmount))
	}
	if b.ByShell != 0 {
		f := p.at["Cw"].times(p.at["slope"]).times(number(0.1)).over(number(3).root())
		if p.load.Vessel.Gives {
			f = negative(f)
		}
		all = append(all, p.share("s3", "by the wall, known within 10 %", f, b.ByShell))
	}
	if b.ByGain != 0 {
		gain := math.Abs(p.Site.Tags[p.Basis.Inputs[0].Source.Tag].Accuracy.Rel)
		all = append(all, p.share("s4", "by the gain of the thermometer's scale", p.at["duty"].times(number(gain)).over(number(3).root()), b.ByGain))
	}
	return all
}

// vesselProperties writes the shares of the fluid's own figures.
func (p *page) vesselProperties(s *shares) {
	b := p.Basis.Vessel
	f := p.at["m"].times(p.at["c"]).times(p.at["slope"])
	if p.load.Vessel.Gives {
		f = negative(f)
	}
	q := p.worked("Qm", "duty that goes with the content", f, b.ByContent/1e3, "kW", place(b.ByContent/1e3, fine), "")
	ofCp := q
	if p.load.Vessel.Rigid {
		ofCp = p.given("Qc", "duty that goes with cp, of which cv is R less", b.ByCp/1e3, "kW", place(b.ByCp/1e3, fine), p.citation)
	}
	p.ofProperty(s, loads.PartCp, "cp", "specific heat", ofCp, b.ByCp)
	p.ofProperty(s, loads.PartDensity, "ρ", "density", q, b.ByContent)
	p.ofProperty(s, loads.PartStrength, "w", "specific heat and density by the strength of the mixture", q, b.ByContent)
}

// vesselRandom writes what changes from reading to reading.
func (p *page) vesselRandom(s *shares) {
	u := p.slopeError()
	s.random = append(s.random, p.share("rT", "random share of the rise", p.at["capacity"].times(u), p.Basis.Vessel.Capacity*p.Basis.Vessel.Rate.Error))
	if in := &p.Basis.Inputs[2]; in.Scatter > 0 && in.By != 0 {
		q, sd := p.quantity(in), math.Sqrt(in.Scatter)
		z := p.given("z"+q.symbol, "content, random, of one reading", sd, q.unit, place(sd, coarse+2), byReadings)
		s.random = append(s.random, p.share("r"+q.symbol, "random share of the content", named("c"+q.symbol, fixedValue(in.By/1e3, coarse+2)).times(z), in.By*sd))
	}
}

// fixedValue is x as it is printed with so many digits.
func fixedValue(x float64, digits int) float64 { return parse(fixed(x, place(x, digits))) }
