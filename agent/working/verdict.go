package working

import (
	"fmt"
	"math"

	"heatreeve/agent/design"
	"heatreeve/agent/design/steady"
	"heatreeve/agent/figure"
)

// verdict writes how the duty stands to what is expected, and why.
func (p *page) verdict() {
	g := &p.Grounds
	if p.Basis.Figure.Measured() && !p.Basis.Figure.Idle && g.Ground != design.NoTarget {
		p.expected()
	}
	p.begin("Verdict: " + p.Verdict)
	defer p.end()
	switch {
	case !p.Basis.Figure.Measured():
		p.say("blind: there is no duty to compare")
		return
	case p.Basis.Figure.Idle:
		p.say("idle: nothing is compared while nothing flows or warms")
		return
	case g.Ground == design.NoTarget:
		p.say("the site file gives no design duty")
		return
	}
	if g.Compared() || g.Ground == design.Unsteady {
		p.deviation()
		p.steadiness()
	}
	p.drift()
	p.say(p.because())
}

// deviation writes how far the last minutes are from what was expected of them.
func (p *page) deviation() {
	g := &p.Grounds
	n := place(g.Duty/1e3, fine)
	mean := p.given("Qn", fmt.Sprintf("mean duty of the last %d minutes", g.Lasting), g.Duty/1e3, "kW", n, "minutes before")
	expected := p.at["expected"]
	if g.Expected != g.Today.Duty {
		expected = p.given("En", "mean of what was expected of them", g.Expected/1e3, "kW", n, "minutes before")
	}
	p.worked("a", "allowance", named("allow", g.Target.Allow).times(expected), g.Allowance()/1e3, "kW", place(g.Allowance()/1e3, fine), "")
	d := p.worked(figure.Deviation.Symbol, figure.Deviation.Words, mean.minus(expected), g.Deviation/1e3, "kW", n, "")
	p.given("δmin", "the least of a minute", g.Least/1e3, "kW", max(0, n), "")
	p.given("δmax", "the greatest", g.Most/1e3, "kW", max(0, n), "")
	p.significance(d)
}

// significance writes how far the deviation stands out of its uncertainty.
func (p *page) significance(d term) {
	g := &p.Grounds
	x := g.Uncertainty() / 1e3
	if x == 0 {
		return
	}
	s, r := g.Systematic/1e3, g.Random/1e3
	lasting := p.given("sδ", "standard uncertainty of the deviation, by what lasts", s, "kW", place(s, coarse+1), byLaw)
	random := p.given("rδ", "and by what averages out", r, "kW", place(r, coarse+1), byLaw)
	u := p.worked(figure.DeviationUncertainty.Symbol, figure.DeviationUncertainty.Words, sum(squares([]term{lasting, random})).root(), x, "kW", place(x, coarse+1), byLaw)
	p.worked("Uδ", "expanded, with the coverage factor 2", number(CoverageFactor).times(u), CoverageFactor*x, "kW", place(x, coarse), "JCGM 100:2008, 6.3.3")
	z := g.Deviation / g.Uncertainty()
	p.worked("δ/u", "deviation in standard uncertainties", d.over(u), z, "1", place(z, 3), "")
}

// steadiness writes which quantity moved the duty most: it is steady where that is let pass,
// or neither its R-statistic nor its slope stand out.
func (p *page) steadiness() {
	s := &p.Grounds.Steady
	if s.Worst == "" || s.Limit == 0 {
		return
	}
	p.given("Δ", fmt.Sprintf("change of the duty by the %s, which moved it most", s.Worst), s.Change/1e3, "kW", place(s.Change/1e3, coarse), bySlope)
	p.given("Δa", "let pass as steady, the allowance now", s.Limit/1e3, "kW", place(s.Limit/1e3, fine), "")
	if unit := slopeUnits[s.Worst]; unit != "" {
		p.given("b", "its slope", s.Slope, unit, place(s.Slope, coarse), bySlope)
	}
	p.given("b/s", "that slope in its standard errors", s.T, "1", place(s.T, 3), "")
	if s.R > 0 {
		p.given("R", fmt.Sprintf("its R-statistic, about 1 at rest and above %g where it moves", steady.Rejects), s.R, "1", place(s.R, 3), byRatio)
	}
	switch {
	case s.Steady && s.Change <= s.Limit:
		p.say("steady: that moves the duty by no more than is let pass")
	case s.Steady:
		p.say("steady: neither its slope nor its R-statistic stands out")
	}
}

// slopeUnits are those of the slopes of what a gate looks at.
var slopeUnits = map[string]string{"flow": "kg/s/min", "inlet": "K/min", "outlet": "K/min"}

const (
	bySlope = "least squares through the minutes"
	byRatio = "Cao and Rhinehart, J. Process Control 5 (1995)"
)

// drift writes the sums of deviations that are small but stay.
func (p *page) drift() {
	x := &p.Grounds.Drift
	if p.Past || x.Windows == 0 {
		return
	}
	if x.Waits > 0 {
		p.say(fmt.Sprintf("drift: windows are compared once %d more have shown how they scatter", x.Waits))
		return
	}
	d := p.given("δw", "deviation of the last window, as a part", x.Deviation, "1", place(x.Deviation, fine), "windows that do not overlap")
	dead := p.given("D", "dead band, 2.5 times what of its uncertainty lasts", x.Dead, "1", place(x.Dead, coarse+1), "")
	scatter := p.given("σw", "standard deviation of windows", x.Scatter, "1", place(x.Scatter, coarse+1), "successive differences, and random parts")
	if x.X != 0 {
		beyond := d.minus(dead)
		if x.X < 0 {
			beyond = d.plus(dead)
		}
		p.worked("y", "beyond the dead band, in standard deviations", beyond.over(scatter), x.X, "1", place(x.X, coarse), "")
	}
	p.given("S+", "sum of y − 0.5 upward", x.High, "1", place(x.High, coarse), cusum)
	p.given("S-", "and downward", x.Low, "1", place(x.Low, coarse), cusum)
	p.given("h", "limit of the sums, by the false warnings a year", x.Limit, "1", place(x.Limit, coarse), "")
	if x.Side != 0 {
		p.say(fmt.Sprintf("drift: the duty has been off by about %s %% since %s", fixed(100*x.Size, 1), p.instant(x.Since)))
	}
}

const cusum = "tabular CUSUM: NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2.3"

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
	case design.NotExpected:
		return "undecided: nothing is known of what is expected: " + g.Why
	case design.Unsteady:
		if g.Steady.Steady {
			return fmt.Sprintf("undecided: by %d of the %d minutes the load was not steady, and no duty is beyond its allowance until it was for all of them", g.Moving, g.Lasting)
		}
		return fmt.Sprintf("undecided: the %s is not steady, and nothing is compared until it is", g.Steady.Worst)
	case design.Beyond:
		return fmt.Sprintf("%v: each of the %d minutes lies %s what was expected by more than the allowance, and their mean by more than its expanded uncertainty of %s kW", g.Verdict, g.Lasting, side, U)
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
