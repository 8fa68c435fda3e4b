package store

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
	"time"
)

// measured makes a minute from 60 figures of a water circuit whose flow and temperatures
// wander, with the parts of its uncertainty: flow, both thermometers, what the pair has
// in common, heat capacity, and density.
func measured(rng *rand.Rand, load uint32, start int64) Minute {
	m := Minute{Load: load, Start: start, Measured: 60, DutyMin: math.Inf(1), DutyMax: math.Inf(-1)}
	flow, inlet, outlet := 8+rng.NormFloat64(), 353+2*rng.NormFloat64(), 333+rng.NormFloat64()
	for range 60 {
		flow += 0.02 * rng.NormFloat64()
		inlet += 0.02 * rng.NormFloat64()
		outlet += 0.02 * rng.NormFloat64()
		duty := flow * 4190 * (inlet - outlet)
		shares := [...]float64{0: 0.005 * duty, 1: flow * 4190 * 0.2, 2: -flow * 4190 * 0.2, 8: flow * 4190 * 0.05, 9: 0.001 * duty, 10: 0.0003 * duty}
		random := 0.002 * duty
		variance := random * random
		for i, x := range shares {
			m.Systematic[i] += x
			variance += x * x
		}
		m.Given += duty
		m.Duty += duty / 60
		m.DutyMin, m.DutyMax = min(m.DutyMin, duty), max(m.DutyMax, duty)
		m.DutyUncertainty += math.Sqrt(variance) / 60
		m.Random += random * random * 10
		m.Flow += flow / 60
		m.Inlet += inlet / 60
		m.Outlet += outlet / 60
		m.Pressure += (5.1e5 + 100*rng.NormFloat64()) / 60
	}
	return m
}

// BenchmarkMinute tells what a day of minutes and the hours of 10 loads take: B/minute and
// B/hour are the records alone, B/page what the pages of the minutes take of each, and B/sealed
// the same once they are sealed.
// B/first-layout is what a record of the first layout takes, which tells no parts.
func BenchmarkMinute(b *testing.B) {
	for _, tt := range []struct {
		what string
		trim func(m *Minute)
	}{
		{"heat-alone", func(m *Minute) { m.Systematic, m.Random = [Shares]float64{}, 0 }},
		{"with-parts", func(m *Minute) {}},
		{"with-fixed-design", func(m *Minute) { m.Expected, m.ExpectedError = 640e3, 6.4e3 }},
		{"with-moving-design", func(m *Minute) { m.Expected, m.ExpectedError = 0.98*m.Duty, 0.01*m.Duty }},
		{"with-all", func(m *Minute) {
			m.Measured, m.Bridged, m.BridgedGiven, m.Latent = 50, 10, m.Given/5.1, 20
			m.Witness, m.Compared, m.Content = m.Given/1.01, m.Given/1.02, 340.1+m.Inlet/1e4
		}},
	} {
		b.Run(tt.what, func(b *testing.B) {
			for b.Loop() {
				benchmarkMinutes(b, tt.trim)
			}
		})
	}
}

func benchmarkMinutes(b *testing.B, trim func(*Minute)) {
	s := neverSeals(b, Options{})
	rng := rand.New(rand.NewPCG(9, 10))
	first, now, hours := 0, 0, 0
	const start, minutes, loads = 20_000 * day, 1440, 10
	var sums [loads]hourSum
	for minute := range int64(minutes) {
		var batch Batch
		for load := range uint32(loads) {
			m := measured(rng, load, start+minute*60*second)
			trim(&m)
			first += len(appendFirst(nil, m))
			now += len(appendMinute(nil, m.kept()))
			if minute < 60 {
				sums[load].add(&m)
			}
			batch.Minutes = append(batch.Minutes, m)
		}
		commit(b, s, batch)
	}
	for i := range sums {
		hours += len(appendHour(nil, sums[i].hour()))
	}
	b.ReportMetric(float64(first)/minutes/loads, "B/first-layout")
	b.ReportMetric(float64(now)/minutes/loads, "B/minute")
	b.ReportMetric(float64(bucketBytes(b, s, bucketMinutes))/minutes/loads, "B/page")
	sealAllMinutes(b, s)
	b.ReportMetric(float64(bucketBytes(b, s, bucketMinutes))/minutes/loads, "B/sealed")
	b.ReportMetric(float64(hours)/loads, "B/hour")
	if n := len(drain(b, s.Minutes(3, start, start+day))); n != minutes {
		b.Fatalf("%d minutes", n)
	}
}

// sealAllMinutes seals what can be sealed, and returns how long the longest step took.
func sealAllMinutes(b *testing.B, s *Store) (worst time.Duration) {
	b.Helper()
	s.minuteSealing.after = 0
	commit(b, s, Batch{Minutes: []Minute{{Start: 30_000 * day}}}) // all of them are old beside it
	for {
		begun := time.Now()
		cost, err := s.minuteStep()
		worst = max(worst, time.Since(begun))
		if err != nil {
			b.Fatal(err)
		}
		if cost == 0 {
			return worst
		}
	}
}

// BenchmarkSealMinutes seals a span of minutes: ns/minute and ms/worst are the time that it
// takes, of a minute and of the longest step, which one commit has to bear; and B/written is what
// bbolt writes for a minute by that.
func BenchmarkSealMinutes(b *testing.B) {
	for _, loads := range []uint32{10, 1000} {
		b.Run(fmt.Sprintf("%d-loads", loads), func(b *testing.B) {
			for b.Loop() {
				b.StopTimer()
				s := neverSeals(b, Options{MaxBytes: 1 << 30})
				rng := rand.New(rand.NewPCG(9, 10))
				for minute := range int64(sealedSpan / (60 * second)) {
					var batch Batch
					for load := range loads {
						batch.Minutes = append(batch.Minutes, measured(rng, load, 80_000*sealedSpan+minute*60*second))
					}
					commit(b, s, batch)
				}
				n := float64(loads) * float64(sealedSpan/(60*second))
				before := s.db.Stats().TxStats
				b.StartTimer()
				begun := time.Now()
				worst := sealAllMinutes(b, s)
				took := time.Since(begun)
				b.StopTimer()
				after := s.db.Stats().TxStats
				b.ReportMetric(float64(took.Nanoseconds())/n, "ns/minute")
				b.ReportMetric(float64(worst.Microseconds())/1e3, "ms/worst")
				b.ReportMetric(float64(after.GetPageAlloc()-before.GetPageAlloc())/n, "B/written")
				b.StartTimer()
			}
		})
	}
}
