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
// by the exact equations, and from a table.
func BenchmarkBeat(b *testing.B) {
	b.Run("exact", func(b *testing.B) { beats(b, water.Liquid()) })
	b.Run("table", func(b *testing.B) { beats(b, water.Tabulate(water.Liquid(), 273.15, 433.15, 1e5, 17e5)) })
}

func beats(b *testing.B, f thermo.Fluid) {
	const n = 1000
	e, err := New(waterPlant(n, f))
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
		for i := range n {
			for k, v := range [...]float64{2e-3, 343 + t, 323 - t, 4e5 + 1e3*t} {
				readings[4*i+k] = Reading{4*i + k, at, v}
			}
		}
		closed = e.Advance(Beat{readings, at}, closed[:0])
	}
	if f := e.Snapshot().Loads[n-1].Figure; !f.Measured() || f.Uncertainty == 0 {
		b.Fatalf("fault %v (%s), uncertainty %g W", f.Fault, f.Reason, f.Uncertainty)
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/n, "ns/load")
}
