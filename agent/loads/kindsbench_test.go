package loads

import (
	"testing"

	"heatreeve/thermo/water"
)

// BenchmarkKinds is one beat of a plant of 1,000 loads of a kind where every temperature
// has a new value: vessels, streams with all corrections, and streams whose tags report by
// exception and are quiet, with a heartbeat.
func BenchmarkKinds(b *testing.B) {
	const n = 1000
	vessels, corrected := Config{Grid: second}, waterPlant(n, water.Liquid())
	quiet := waterPlant(n, water.Liquid())
	for i := range n {
		v := tank()
		v.Fluid, v.Temperature = water.Liquid(), FromTag(i)
		vessels.Tags = append(vessels.Tags, Tag{MaxAge: minute, Accuracy: Accuracy{Abs: 0.15, Rel: 0.002}})
		vessels.Loads = append(vessels.Loads, Load{Vessel: &v})
		corrected.Loads[i].Stream.Corrections = Corrections{Pump: Constant(1e3), HasPump: true, Hold: 0.1, Stored: 1e6, StoredOver: 5 * minute}
	}
	for i := range quiet.Tags {
		quiet.Tags[i].OnChange, quiet.Tags[i].Alive = true, len(quiet.Tags)
	}
	quiet.Tags = append(quiet.Tags, Tag{Name: "PLC", MaxAge: minute})
	b.Run("vessels", func(b *testing.B) { sway(b, vessels, func(i int) bool { return true }) })
	b.Run("corrected", func(b *testing.B) { sway(b, corrected, func(i int) bool { return true }) })
	b.Run("quiet", func(b *testing.B) { sway(b, quiet, func(i int) bool { return i == len(quiet.Tags)-1 }) })
}

// sway runs the plant for ten minutes and measures what a beat costs from then on; tags
// that do not tell anew told once.
func sway(b *testing.B, cfg Config, tells func(tag int) bool) {
	e, err := New(cfg)
	if err != nil {
		b.Fatal(err)
	}
	var readings []Reading
	var closed []Minute
	at := epoch
	beat := func() {
		t := float64(at/second%60) / 60
		readings = readings[:0]
		for i := range cfg.Tags {
			if at == epoch || tells(i) {
				v := 343 + t
				if len(cfg.Tags) > len(cfg.Loads) {
					v = [...]float64{2e-3, 343 + t, 323 - t, 4e5}[i%4]
				}
				readings = append(readings, Reading{Tag: i, At: at, Value: v})
			}
		}
		closed = e.Advance(Beat{readings, at}, closed[:0])
		at += second
	}
	for range 600 {
		beat()
	}
	b.ReportAllocs()
	for b.Loop() {
		beat()
	}
	for _, l := range e.Snapshot().Loads {
		if f := l.Figure; !f.Measured() {
			b.Fatalf("fault %v (%s)", f.Fault, f.Reason)
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(len(cfg.Loads)), "ns/load")
}
