package agent

import (
	"cmp"
	"math"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/thermo"
	"heatreeve/thermo/water"
)

// tabulate gives the loads on water, and those on steam, tables over the states that
// the site lets them see; loads whose pressures are of one order share one. A state
// outside is worked by the exact equations. It pays for a single load already: a table
// holds at most some hundred KB, takes milliseconds to build, and has saved that time
// again within hours. It follows from the site alone, so a restart gives the same
// figures.
func tabulate(s *site.Site, to []loads.Load) {
	for _, w := range [...]struct {
		fluid thermo.Fluid
		usual box
	}{{water.Liquid(), usualWater}, {water.Steam(), usualSteam}} {
		boxes := make(map[int]box)
		for i := range s.Loads {
			if on(&s.Loads[i], w.fluid) {
				b := seenBy(s, &s.Loads[i], w.usual)
				all, ok := boxes[b.order()]
				if !ok {
					all = box{nothing, nothing}
				}
				boxes[b.order()] = box{all.T.with(b.T), all.p.with(b.p)}
			}
		}
		tables := make(map[int]thermo.Fluid, len(boxes))
		for order, b := range boxes {
			tables[order] = water.Tabulate(w.fluid, b.T.lo-slackT, b.T.hi+slackT, b.p.lo/slackP, b.p.hi*slackP)
		}
		for i := range s.Loads {
			if on(&s.Loads[i], w.fluid) {
				b := seenBy(s, &s.Loads[i], w.usual)
				to[i].Stream.Fluid = tables[b.order()]
			}
		}
	}
}

// on tells whether the load is a stream of the fluid. A vessel is worked once a reading,
// and needs no table.
func on(l *site.HeatLoad, f thermo.Fluid) bool { return l.Stream != nil && l.Stream.Fluid == f }

// order is that of the highest pressure, as a power of ten.
func (b box) order() int { return int(math.Floor(math.Log10(b.p.hi))) }

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

func (a span) within(b span) span { return span{max(a.lo, b.lo), min(a.hi, b.hi)} }

func (a span) holds(b span) bool { return a.lo <= b.lo && a.hi >= b.hi }

// box is a range of states.
type box struct{ T, p span }

// What a load is taken to see where its tags have no range: heating and chilled
// circuits, the steam of a works (common practice, no source).
var (
	usualWater = box{span{273.15, 473.15}, span{50e3, 2.5e6}}
	usualSteam = box{span{373.15, 673.15}, span{50e3, 2.5e6}}
)

// seenBy returns what load l sees: its constants, the ranges of its tags, and its
// design. Where the design tells both temperatures, or the pressure, that is what it
// sees, give or take 60 K, and half the pressure.
func seenBy(s *site.Site, l *site.HeatLoad, usual box) box {
	limits, x, d := l.Stream.Fluid.Bounds(), l.Stream, &l.Design
	b := box{nothing, nothing}
	T, p := span{limits.MinT, limits.MaxT}, span{limits.MinP, limits.MaxP}
	for _, src := range [...]site.Source{x.Inlet, x.Outlet, known(d.Inlet), known(d.Outlet)} {
		b.T = b.T.with(seen(s, src, T, usual.T))
	}
	for _, src := range [...]site.Source{x.Pressure, x.OutletPressure, known(d.Pressure)} {
		b.p = b.p.with(seen(s, src, p, usual.p))
	}
	in, out := cmp.Or(d.Inlet, x.Inlet.Value), cmp.Or(d.Outlet, x.Outlet.Value)
	if in > 0 && out > 0 {
		b.T = b.T.within(span{min(in, out) - 60, max(in, out) + 60})
	}
	if d.Pressure > 0 {
		b.p = b.p.within(span{d.Pressure / 2, d.Pressure * 1.5})
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
