package design

import (
	"fmt"
	"testing"
	"time"

	"heatreeve/agent/design/expect"
)

// BenchmarkMinute is a minute of 1,000 streams, of which each is short and warned of.
func BenchmarkMinute(b *testing.B) {
	var cfg Config
	for i := range 1000 {
		cfg.Loads = append(cfg.Loads, Target{Name: fmt.Sprint("load-", i), Allow: 0.08, Lasting: 10 * time.Minute, Expect: expect.Fixed{Duty: 640e3}})
	}
	p, at := NewPlant(cfg), int64(0)
	minute := func() {
		for i := range cfg.Loads {
			p.Observe(i, Minute{Start: at, Whole: true, Duty: 500e3, Uncertainty: 4e3, Flow: 6, Inlet: 340, Outlet: 320}, 0)
		}
		p.Changed()
		at += nanosecondsPerMinute
	}
	for range 20 {
		minute()
	}
	for b.Loop() {
		minute()
	}
	b.ReportMetric(float64(len(p.Warnings())), "warnings")
}
