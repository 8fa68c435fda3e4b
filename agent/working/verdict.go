package working

import (
	"fmt"
	"math"

	"heatreeve/agent/design"
)

// verdict writes how the duty stands to its design, and why.
func (p *page) verdict() {
	g := &p.Grounds
	p.begin("Verdict: " + p.Verdict)
	defer p.end()
	switch {
	case !p.Basis.Figure.Measured():
		p.say("blind: there is no duty to compare")
		return
	case p.Basis.Figure.Idle:
		p.say("idle: nothing is compared while nothing flows or warms")
		return
	}
	if g.Ground == design.NoTarget {
		p.say("the site file gives no design duty")
		return
	}
	design0 := p.given("Qd", "design duty", g.Today.Duty/1e3, "kW", place(g.Today.Duty/1e3, 10), "site file")
	p.worked("a", "allowance", named("allow", g.Target.Allow).times(design0), g.Target.Allow*g.Today.Duty/1e3, "kW", place(g.Target.Allow*g.Today.Duty/1e3, fine), "")
	if g.Ground != design.TooFew && g.Ground != design.NotWhole {
		p.deviation(design0)
	}
	p.say(p.because())
}

// deviation writes how far the last minutes are from design.
func (p *page) deviation(design0 term) {
	g := &p.Grounds
	n := place(g.Duty/1e3, fine)
	mean := p.given("Qn", fmt.Sprintf("mean duty of the last %d minutes", g.Lasting), g.Duty/1e3, "kW", n, "minutes before")
	p.given("Qmin", "the least of their means", (g.Expected+g.Least)/1e3, "kW", n, "")
	p.given("Qmax", "the greatest", (g.Expected+g.Most)/1e3, "kW", n, "")
	d := p.worked("d", "deviation", mean.minus(design0), g.Deviation/1e3, "kW", n, "")
	u := p.given("un", "standard uncertainty of that mean", g.Uncertainty()/1e3, "kW", place(g.Uncertainty()/1e3, coarse+1), byLaw)
	if g.Uncertainty() > 0 {
		x := g.Deviation / g.Uncertainty()
		p.worked("d/u", "deviation in standard uncertainties", d.over(u), x, "1", place(x, 3), "")
	}
}

// because says what decides.
func (p *page) because() string {
	g := &p.Grounds
	U := fixed(CoverageFactor*g.Uncertainty()/1e3, place(CoverageFactor*g.Uncertainty()/1e3, 3))
	side := "below"
	if g.Deviation > 0 {
		side = "above"
	}
	switch g.Ground {
	case design.TooFew:
		return fmt.Sprintf("undecided: it waits for %d more of %d minutes", g.Lasting-g.Minutes, g.Lasting)
	case design.NotWhole:
		return fmt.Sprintf("undecided: it waits for %d minutes in a row that are measured and flow for 54 s or more", g.Lasting)
	case design.Unsteady:
		return fmt.Sprintf("undecided: the minutes are %s kW apart, by more than the allowance, so the load is not steady; it waits until they are not", fixed((g.Most-g.Least)/1e3, place((g.Most-g.Least)/1e3, 3)))
	case design.Beyond:
		return fmt.Sprintf("%v: each of the %d minutes lies %s the design by more than the allowance, and their mean by more than its expanded uncertainty of %s kW", g.Verdict, g.Lasting, side, U)
	case design.TooUnsure:
		return fmt.Sprintf("undecided: the expanded uncertainty of %s kW is as wide as the allowance; better instruments or a wider allowance would decide", U)
	case design.Within:
		return fmt.Sprintf("holding: each of the %d minutes lies within the allowance", g.Lasting)
	}
	if math.Abs(g.Deviation) <= CoverageFactor*g.Uncertainty() {
		return fmt.Sprintf("%v: the deviation does not stand out of the expanded uncertainty of %s kW, so the verdict before stands", g.Verdict, U)
	}
	return fmt.Sprintf("%v: some minutes lie within the allowance and some beyond, so the verdict before stands; it waits until all agree", g.Verdict)
}
