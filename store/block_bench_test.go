package store

import (
	"math"
	"math/bits"
	"math/rand/v2"
	"testing"
)

// drift is a random walk of 50 tags whose readings, each 10 s, are decimals 0.01
// apart; its steps are normal with a deviation of 0.094. si turns them into SI.
func drift(n int, si func(x float64) float64) (cols columns, s span, entropy float64) {
	rng := rand.New(rand.NewPCG(3, 9))
	cols, s = columns{}, newSpan(1)
	steps := map[float64]int{}
	for tag := range uint32(50) {
		x, before := 40+float64(tag), 40.0+float64(tag)
		for i := range int64(n) {
			x += 0.094 * rng.NormFloat64()
			v := math.Round(x*100) / 100
			steps[math.Round((v-before)*100)]++
			before = v
			r := Reading{Tag: tag, At: (1_760_000_000 + 10*i) * second, Value: si(v), Stamped: true}
			s.add([]Beat{{Through: r.At, Readings: []Reading{r}}})
			cols.add(r)
		}
	}
	for _, k := range steps {
		p := float64(k) / float64(50*n)
		entropy -= p * math.Log2(p)
	}
	return cols, s, entropy / 8
}

// BenchmarkBlock packs and reads back the drift of 50 tags: B/sample is the whole
// block, B/entropy what the steps alone hold, B/xor what the XOR scheme would take for
// the same column, and B/raw time and value as they are.
func BenchmarkBlock(b *testing.B) {
	for _, tt := range []struct {
		what string
		si   func(x float64) float64
	}{
		{"decimal", func(x float64) float64 { return x }},
		{"celsius", func(x float64) float64 { return x + 273.15 }},
		{"hourly", func(x float64) float64 { return x / 3600 }},
		{"noise", func(x float64) float64 { return math.Sqrt(x + 1e-3*math.Sin(1e6*x)) }},
	} {
		cols, s, entropy := drift(1310, tt.si)
		samples := float64(s.readings)
		b.Run(tt.what+"/write", func(b *testing.B) {
			var block []byte
			for b.Loop() {
				w := packed(cols, s)
				block = w.block()
			}
			xor := 0
			for _, c := range cols {
				xor += xorBits(c)
			}
			b.ReportMetric(float64(len(block))/samples, "B/sample")
			b.ReportMetric(entropy, "B/entropy")
			b.ReportMetric(float64(xor)/8/samples, "B/xor")
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/samples/float64(b.N), "ns/sample")
		})
		b.Run(tt.what+"/read", func(b *testing.B) {
			w := packed(cols, s)
			name, block := s.name(), w.block()
			n := 0
			for b.Loop() {
				n = 0
				if err := eachReading(name, block, 30, func(Reading) bool { n++; return true }); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(n)/float64(b.N), "ns/sample")
		})
	}
}

// xorBits is the size of a column in the XOR scheme of Pelkonen et al., "Gorilla: a
// fast, scalable, in-memory time series database", Proc. VLDB Endowment 8 (2015),
// section 4.1, with times in whole seconds, its best case.
func xorBits(c *column) int {
	n := 64 + 14 + 64 // header with the block's time, first difference, first value
	leading, trailing := 65, 0
	for i := 1; i < len(c.bits); i++ {
		var before int64
		if i > 1 {
			before = c.at[i-1] - c.at[i-2]
			n += timeBits((c.at[i] - c.at[i-1] - before) / second)
		}
		word := c.bits[i] ^ c.bits[i-1]
		l, t := min(bits.LeadingZeros64(word), 31), bits.TrailingZeros64(word)
		switch {
		case word == 0:
			n++
		case l >= leading && t >= trailing:
			n += 2 + 64 - leading - trailing
		default:
			leading, trailing = l, t
			n += 2 + 5 + 6 + 64 - l - t
		}
	}
	return n
}

// timeBits is what the scheme takes for a difference of differences of times.
func timeBits(d int64) int {
	switch {
	case d == 0:
		return 1
	case d >= -63 && d <= 64:
		return 2 + 7
	case d >= -255 && d <= 256:
		return 3 + 9
	case d >= -2047 && d <= 2048:
		return 4 + 12
	}
	return 4 + 32
}
