package loads

import (
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/water"
)

// waterPlant is n loads on the liquid f by volume, each with a flow, two temperatures and a
// pressure of its own, all of them with an accuracy.
func waterPlant(n int, f thermo.Fluid) Config {
	cfg := Config{Grid: second}
	for i := range n {
		k := 4 * i
		for _, a := range [...]Accuracy{{Rel: 0.01}, {Abs: 0.15, Rel: 0.002, Zero: 273.15}, {Abs: 0.15, Rel: 0.002, Zero: 273.15}, {Abs: 5e3}} {
			cfg.Tags = append(cfg.Tags, Tag{MaxAge: minute, Accuracy: a})
		}
		cfg.Loads = append(cfg.Loads, Load{Stream: Stream{
			Fluid: f, FlowKind: VolumeFlow, Flow: FromTag(k), Inlet: FromTag(k + 1), Outlet: FromTag(k + 2),
			Pressure: FromTag(k + 3), OutletPressure: FromTag(k + 3), Gives: true, Margin: 5,
		}})
	}
	return cfg
}

// BenchmarkBeat is one beat of a plant of 1,000 water loads where every tag has a new
// value: 4,000 readings in, 1,000 duties with their uncertainties booked. It is worked
// by the exact equations, and from a table; and with counters for the flows, from a
// table, which tell every second.
func BenchmarkBeat(b *testing.B) {
	const n = 1000
	table := water.Tabulate(water.Liquid(), 273.15, 433.15, 1e5, 17e5)
	rate := func(int64) float64 { return 2e-3 }
	b.Run("exact", func(b *testing.B) { beats(b, n, waterPlant(n, water.Liquid()), rate) })
	b.Run("table", func(b *testing.B) { beats(b, n, waterPlant(n, table), rate) })
	b.Run("counted", func(b *testing.B) {
		cfg := waterPlant(n, table)
		for i := range n {
			cfg.Tags[4*i].Counter = &Counter{Largest: 1}
		}
		beats(b, n, cfg, func(at int64) float64 { return 2e-3 * float64(at-epoch) / 1e9 })
	})
}

// beats works beats of n loads, of whose flow tags at gives the number at an instant.
func beats(b *testing.B, n int, cfg Config, flow func(at int64) float64) {
	e, err := New(cfg)
	if err != nil {
		b.Fatal(err)
	}
	readings := make([]Reading, 4*n)
	var closed []Minute
	at := epoch
	b.ReportAllocs()
	for b.Loop() {
		at += second
		t := float64(at/second%60) / 60 // the plant sways within a minute
		q := flow(at)
		for i := range n {
			for k, v := range [...]float64{q, 343 + t, 323 - t, 4e5 + 1e3*t} {
				readings[4*i+k] = Reading{Tag: 4*i + k, At: at, Value: v}
			}
		}
		closed = e.Advance(Beat{readings, at}, closed[:0])
	}
	if f := e.Snapshot().Loads[n-1].Figure; b.N > 2 && (!f.Measured() || f.Uncertainty == 0) {
		b.Fatalf("fault %v (%s), uncertainty %g W", f.Fault, f.Reason, f.Uncertainty)
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(n), "ns/load")
}
