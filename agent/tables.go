package agent

import (
	"math"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/thermo"
	"heatreeve/thermo/water"
)

// tabulate gives the loads on water one table, and those on steam another, over the
// states that the site lets them see. A state outside is worked by the exact
// equations. It pays for a single load already: a table holds at most some hundred
// KB, takes milliseconds to build, and has saved that time again within hours. It
// follows from the site alone, so a restart gives the same figures.
func tabulate(s *site.Site, to []loads.Load) {
	for _, w := range [...]struct {
		fluid thermo.Fluid
		usual box
	}{{water.Liquid(), usualWater}, {water.Steam(), usualSteam}} {
		b := box{nothing, nothing}
		var on []int
		for i, l := range s.Loads {
			if l.Stream.Fluid == w.fluid {
				on = append(on, i)
				b = b.with(s, &l, w.usual)
			}
		}
		f := water.Tabulate(w.fluid, b.T.lo-slackT, b.T.hi+slackT, b.p.lo/slackP, b.p.hi*slackP)
		for _, i := range on {
			to[i].Stream.Fluid = f
		}
	}
}

// A table is that much wider than what a load sees, so that an input moved by its
// uncertainty is in it too.
const (
	slackT = 1    // K
	slackP = 1.02 // factor
)

// span is a range of temperatures in K, or of absolute pressures in Pa.
type span struct{ lo, hi float64 }

var nothing = span{math.Inf(1), math.Inf(-1)}

func (a span) with(b span) span { return span{min(a.lo, b.lo), max(a.hi, b.hi)} }

func (a span) holds(b span) bool { return a.lo <= b.lo && a.hi >= b.hi }

// box is a range of states.
type box struct{ T, p span }

// What a load is taken to see where its tags have no range: heating and chilled
// circuits, the steam of a works (common practice, no source).
var (
	usualWater = box{span{273.15, 473.15}, span{50e3, 2.5e6}}
	usualSteam = box{span{373.15, 673.15}, span{50e3, 2.5e6}}
)

// with returns b widened by what load l sees: its constants, the ranges of its tags,
// and its design.
func (b box) with(s *site.Site, l *site.HeatLoad, usual box) box {
	limits, x := l.Stream.Fluid.Bounds(), &l.Stream
	T, p := span{limits.MinT, limits.MaxT}, span{limits.MinP, limits.MaxP}
	for _, src := range [...]site.Source{x.Inlet, x.Outlet, known(l.Design.Inlet), known(l.Design.Outlet)} {
		b.T = b.T.with(seen(s, src, T, usual.T))
	}
	for _, src := range [...]site.Source{x.Pressure, x.OutletPressure, known(l.Design.Pressure)} {
		b.p = b.p.with(seen(s, src, p, usual.p))
	}
	return b
}

// known is a figure of the design as a source; 0 is none.
func known(v float64) site.Source { return site.Source{Tag: -1, Value: v} }

// seen is what a source can read within the limits of the fluid. A tag without a range
// of its own, or with one that holds the fluid's whole, sees what is usual.
func seen(s *site.Site, src site.Source, limits, usual span) span {
	if src.Constant() {
		if src.Value == 0 {
			return nothing
		}
		return span{src.Value, src.Value}
	}
	t := &s.Tags[src.Tag]
	if (span{t.Min, t.Max}).holds(limits) {
		return usual
	}
	return span{max(t.Min, limits.lo), min(t.Max, limits.hi)}
}
