package agent

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/thermo/water"
)

// mill has two loads on water and one each on steam and glycol; some of its tags have a
// range.
const mill = `
site: Mill
timezone: UTC
barometer: 100 kPa
broker: {url: "mqtt://127.0.0.1:1883"}
fluids:
  brine: {propylene glycol: 32 %}
tags:
  F: {topic: f, unit: kg/s, accuracy: 0.5 % of reading}
  T1: {topic: a, unit: °C, accuracy: IEC 60751 A, range: [0 °C, 160 °C]}
  T2: {topic: b, unit: °C, accuracy: IEC 60751 A, range: [-50 °C, 120 °C]}
  T3: {topic: c, unit: °C, accuracy: IEC 60751 A}
  T4: {topic: d, unit: °C, accuracy: IEC 60751 A}
  P1: {topic: e, unit: barg, accuracy: 0.5 % of 16 bar, range: [0 barg, 16 barg]}
  P2: {topic: g, unit: barg, accuracy: 0.5 % of 16 bar}
loads:
  ranged:
    stream: {fluid: water, flow: F, inlet: T1, outlet: T2, pressure: P1, gives: heat}
  fixed:
    stream: {fluid: water, flow: F, inlet: T3, outlet: 70 °C, pressure: 30 barg, gives: heat}
    design: {duty: 1 MW, allow: 8 %, inlet: 210 °C}
  steam:
    stream: {fluid: steam, flow: F, inlet: T3, outlet: T4, pressure: P2, gives: heat}
    design: {duty: 1 MW, allow: 8 %, pressure: 39 barg}
  brine:
    stream: {fluid: brine, flow: F, inlet: T3, outlet: T4, pressure: P2, takes: heat}
`

func TestWhatALoadSees(t *testing.T) {
	s := parsed(t, mill)
	for i, want := range []box{
		{span{273.15, 433.15}, span{1e5, 17e5}},
		{span{283.15, 483.15}, span{31e5, 31e5}},
		{usualSteam.T, span{20e5, 40e5}},
	} {
		usual := usualWater
		if i == 2 {
			usual = usualSteam
		}
		got := seenBy(s, &s.Loads[i], usual)
		for k, pair := range [...][2]float64{{got.T.lo, want.T.lo}, {got.T.hi, want.T.hi}, {got.p.lo, want.p.lo}, {got.p.hi, want.p.hi}} {
			if !(math.Abs(pair[0]-pair[1]) <= 1e-9*pair[1]) {
				t.Errorf("%s: limit %d is %g, want %g", s.Loads[i].Name, k, pair[0], pair[1])
			}
		}
	}
}

// Loads on one fluid at pressures of one order share one table; it is within its bounds
// of the exact equations where the loads are, and has the same bits each time that it
// is built.
func TestTablesOfAPlant(t *testing.T) {
	s := parsed(t, mill)
	cfg, again := plantOf(s), plantOf(s)
	stream := func(cfg loads.Config, i int) *loads.Stream { return &cfg.Loads[i].Stream }
	if stream(cfg, 0).Fluid != stream(cfg, 1).Fluid || stream(cfg, 0).Fluid == water.Liquid() {
		t.Errorf("the loads on water have %T and %T, want one table", stream(cfg, 0).Fluid, stream(cfg, 1).Fluid)
	}
	if stream(cfg, 2).Fluid == water.Steam() {
		t.Error("the load on steam has no table")
	}
	if stream(cfg, 3).Fluid != s.Loads[3].Stream.Fluid {
		t.Error("the load on brine has another fluid than in the site file")
	}
	for i := range 3 {
		exact := *stream(cfg, i)
		exact.Fluid = s.Loads[i].Stream.Fluid
		for k := range 40 {
			T, p := 330+float64(k)/3, 9e5
			if i == 2 {
				T, p = T+200, 30e5
			}
			x := loads.State{Flow: 2, Inlet: T, Outlet: T - 1, Pressure: p, OutletPressure: p}
			want, err := loads.Work(&exact, x)
			got, err2 := loads.Work(stream(cfg, i), x)
			same, err3 := loads.Work(stream(again, i), x)
			if err != nil || err2 != nil || err3 != nil {
				t.Fatal(err, err2, err3)
			}
			if off := math.Abs(got.Duty/want.Duty - 1); !(off <= 3e-6) {
				t.Errorf("%s, %g K: duty %g W from the table, %g W exactly: off by %.2g", s.Loads[i].Name, T, got.Duty, want.Duty, off)
			}
			if got != same {
				t.Errorf("%s, %g K: %+v, built again %+v", s.Loads[i].Name, T, got, same)
			}
		}
	}
}

// manyLoads is a plant of n water loads with four tags each.
func manyLoads(b *testing.B, n int) *site.Site {
	b.Helper()
	var tags, all strings.Builder
	for i := range n {
		fmt.Fprintf(&tags, "  T%d: {topic: t%d, unit: °C, accuracy: IEC 60751 A, range: [0 °C, 160 °C]}\n  R%d: {topic: r%d, unit: °C, accuracy: IEC 60751 A, range: [0 °C, 160 °C]}\n", i, i, i, i)
		fmt.Fprintf(&tags, "  F%d: {topic: f%d, unit: kg/s, accuracy: 0.5 %% of reading}\n  P%d: {topic: p%d, unit: barg, accuracy: 0.5 %% of 16 bar, range: [0 barg, 16 barg]}\n", i, i, i, i)
		fmt.Fprintf(&all, "  load-%d:\n    stream: {fluid: water, flow: F%d, inlet: T%d, outlet: R%d, pressure: P%d, gives: heat}\n", i, i, i, i, i)
	}
	s, err := site.Parse("many.yaml", []byte("site: Many\ntimezone: UTC\nbarometer: 100 kPa\nbroker: {url: \"mqtt://127.0.0.1:1883\"}\ntags:\n"+tags.String()+"loads:\n"+all.String()))
	if err != nil {
		b.Fatal(err)
	}
	return s
}

// BenchmarkPlant is what a start pays for the engine's picture of 1,000 loads, their
// table included.
func BenchmarkPlant(b *testing.B) {
	s := manyLoads(b, 1000)
	b.ReportAllocs()
	for b.Loop() {
		if cfg := plantOf(s); cfg.Loads[0].Stream.Fluid == water.Liquid() {
			b.Fatal("no table")
		}
	}
}
