package cause

import (
	"fmt"
	"math"
)

// away lists what runs away from its design point, by the share of the deviation that it
// explains: the change of the duty with it, times how far it is away, over the deviation.
// It explains no more than the real part of the deviation, which is not misread.
func (e *Evidence) away(iso *isolation, real float64) []Cause {
	var causes []Cause
	for _, in := range e.inputs() {
		off := in.Operating.away()
		if in.away == "" || in.Follows || !stands(off) || !finite(100*off.Value/in.Design) {
			continue
		}
		c := Cause{Kind: in.away, Subject: in.Tag, Figures: []Figure{
			{in.words, in.Value, in.unit, 0},
			{in.words + " at design", in.Design, in.unit, 0},
			{in.words + " against design", off.Value, in.unit, off.zeta()},
		}}
		switch {
		case e.deviates():
			share := in.ByChange * off.Value / e.Deviation.Value
			c.Weight = min(explained(share), real)
			c.Figures = append(c.Figures, Figure{"share of the deviation", share, "1", 0})
			c.Says = fmt.Sprintf("%s and explains %s of the deviation", describe(in, off.Value), percent(share))
		case e.Deviation.Known: // and it is none, whatever runs away from design
			continue
		default:
			c.Weight, c.Says = e.relative(in, off.Value), describe(in, off.Value)
		}
		c.Weight *= sure(off.zeta())
		c.Alike = e.misread(iso, in, off.Value)
		causes = append(causes, c)
	}
	return causes
}

// relative is the weight of what is away while there is no deviation to explain, such as
// while nothing flows: by how much, of the design's flow or temperature difference.
func (e *Evidence) relative(in input, off float64) float64 {
	whole := in.Design
	if in.unit == "K" {
		whole = e.Inlet.Design - e.Outlet.Design
		if e.Inlet.Design == 0 || e.Outlet.Design == 0 {
			return 0
		}
	}
	if whole == 0 {
		return 0
	}
	return min(1, math.Abs(off/whole))
}

// misread tells whether the instrument may read wrong instead: no test would show an error
// of that size.
func (e *Evidence) misread(iso *isolation, in input, off float64) []Kind {
	f := fault{kind: in.kind, tag: in.Tag, effect: in.Error}
	if iso.cleared(f, off) {
		return nil
	}
	return []Kind{in.kind}
}

// describe says where a quantity is.
func describe(in input, off float64) string {
	side := "above"
	if off < 0 {
		side = "below"
	}
	if in.unit == "K" {
		return fmt.Sprintf("%s is %s K %s design", in.words, brief(math.Abs(off)), side)
	}
	return fmt.Sprintf("%s is %s %s design", in.words, percent(math.Abs(off/in.Design)), side)
}

// highFlow is from how much on, in logarithms, a flow above design counts in full as a high
// one, and a difference below it as a low one: flows swing by some per cent all the time.
// Common practice, no source.
const highFlow = 0.1

// lowDifference weighs a flow above design that meets a temperature difference below it: by
// how much of one the other takes back, in logarithms.
func (e *Evidence) lowDifference() []Cause {
	in := e.inputs()
	if len(in) < 3 || in[0].words != "flow" || in[2].words != "outlet" {
		return nil
	}
	flow := in[0].Operating
	difference := Operating{
		Known: true, Value: math.Abs(e.Inlet.Value - e.Outlet.Value), Design: math.Abs(e.Inlet.Design - e.Outlet.Design),
		Uncertainty: math.Hypot(e.Inlet.Uncertainty, e.Outlet.Uncertainty), Scatter: math.Hypot(e.Inlet.Scatter, e.Outlet.Scatter),
	}
	more, less := flow.away(), difference.away()
	if e.Inlet.Design == 0 || e.Outlet.Design == 0 || !(flow.Design > 0) || !(more.zeta() > 2) || !(less.zeta() < -2) {
		return nil
	}
	a, b := math.Log(flow.Value/flow.Design), -math.Log(difference.Value/difference.Design)
	weight := min(a, b) / max(a, b) * min(1, min(a, b)/highFlow) * sure(min(more.zeta(), -less.zeta()))
	if !finite(weight) {
		return nil
	}
	return []Cause{{
		Kind: LowDifference, Weight: weight, Subject: e.Subject,
		Says: fmt.Sprintf("flow is %s above design while the temperature difference is %s below it: look for a bypass, an open valve or a surface that is too small",
			percent(flow.Value/flow.Design-1), percent(1-difference.Value/difference.Design)),
		Figures: []Figure{
			{"flow against design", flow.Value/flow.Design - 1, "1", more.zeta()},
			{"temperature difference", difference.Value, "K", 0},
			{"temperature difference at design", difference.Design, "K", 0},
			{"temperature difference against design", difference.Value/difference.Design - 1, "1", less.zeta()},
		},
	}}
}
