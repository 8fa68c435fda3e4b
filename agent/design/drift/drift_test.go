package drift

import (
	"math"
	"math/rand/v2"
	"testing"
)

func near(t *testing.T, what string, got, want, within float64) {
	t.Helper()
	if !(math.Abs(got-want) <= within) {
		t.Errorf("%s: %.6g, want %.6g ± %g", what, got, want, within)
	}
}

// NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2.3: 20 group means about 325, k =
// 0.3175, h = 4.1959; first signal at group 14. The data are from memory of the handbook, the
// sums recomputed.
func TestCUSUMOfTheHandbook(t *testing.T) {
	data := []float64{324.925, 324.675, 324.725, 324.350, 325.350, 325.225, 324.125, 324.525, 325.225, 324.600,
		324.625, 325.150, 328.325, 327.250, 327.825, 328.500, 326.675, 327.775, 326.875, 328.350}
	high := map[int]float64{5: 0.0325, 13: 3.0075, 14: 4.9400, 15: 7.4475, 17: 11.9875, 18: 14.445, 19: 16.0025, 20: 19.035}
	low := map[int]float64{2: 0.0075, 4: 0.3325, 7: 0.5575, 8: 0.7150, 9: 0.1725, 10: 0.2550, 11: 0.3125, 12: 0}
	var c CUSUM
	first := 0
	for i, x := range data {
		c.Observe(int64(i+1), x-325, 0.3175)
		if first == 0 && max(c.High, c.Low) > 4.1959 {
			first = i + 1
		}
		if want, ok := high[i+1]; ok {
			near(t, "sum above", c.High, want, 1e-9)
		}
		if want, ok := low[i+1]; ok {
			near(t, "sum below", c.Low, want, 1e-9)
		}
	}
	if first != 14 {
		t.Errorf("first signal at group %d, want 14", first)
	}
	if c.HighSince != 13 || c.HighN != 8 {
		t.Errorf("the sum above left zero at %d, %d groups ago; want 13 and 8", c.HighSince, c.HighN)
	}
	near(t, "size", c.Size(1, 0.3175), 0.3175+19.035/8, 1e-9)
	near(t, "size of a sum at rest", c.Size(-1, 0.3175), 0, 0)
}

// NIST/SEMATECH e-Handbook, 6.3.2.4: z0 = 50, s = 2.0539, λ = 0.3; limits 52.5884 and 47.4115.
// The data are from memory; of the averages the sixth is recomputed.
func TestEWMAOfTheHandbook(t *testing.T) {
	low, high := Limits(50, 2.0539, 0.3, 3, 0)
	near(t, "lower limit", low, 47.4115, 1e-3)
	near(t, "upper limit", high, 52.5884, 1e-3)
	data := []float64{52.0, 47.0, 53.0, 49.3, 50.1, 47.0, 51.0, 50.1, 51.2, 50.5, 49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1}
	want := []float64{50.60, 49.52, 50.56, 50.18, 50.16, 49.21, 49.75, 49.85, 50.26, 50.33, 50.11, 49.36, 49.52, 50.05, 49.38, 49.92, 50.73, 51.23, 51.94, 51.99}
	var e EWMA
	for i, x := range data {
		e.Observe(x, 0.3, 50)
		near(t, "average", e.Z, want[i], 0.0051)
		if lo, hi := Limits(50, 2.0539, 0.3, 3, 0); e.Z < lo || e.Z > hi {
			t.Errorf("average %d out of its limits: %v", i+1, e.Z)
		}
	}
}

// Average run lengths of a two-sided CUSUM with k = 0.5: NIST/SEMATECH e-Handbook, 6.3.2.3
// (from memory), and D. Siegmund's approximation (Sequential Analysis, 1985).
func TestAverageRunLength(t *testing.T) {
	for _, tt := range []struct{ h, mean, want, within float64 }{
		{4, 0, 168, 0.5}, {5, 0, 465, 0.5}, {4, 1, 8.38, 0.01}, {5, 1, 10.4, 0.03},
		{4, 0.5, 26.6, 0.1}, {5, 0.5, 38.0, 0.1}, {4, 2, 3.34, 0.01},
	} {
		near(t, "run length", ARL(0.5, tt.h, tt.mean), tt.want, tt.within)
	}
	for _, h := range []float64{4, 6, 8, 10} {
		b := h + 1.166
		siegmund := (math.Exp(b) - b - 1) / (2 * 0.25) / 2
		if got := ARL(0.5, h, 0); math.Abs(got/siegmund-1) > 0.03 {
			t.Errorf("h = %g: run length %g, by Siegmund %g", h, got, siegmund)
		}
	}
	for _, tt := range []struct{ k, arl float64 }{{0.1, 1e3}, {0.1, 1e7}, {0.25, 1e7}} {
		b := Threshold(tt.k, tt.arl) + 1.166
		siegmund := (math.Exp(2*tt.k*b) - 2*tt.k*b - 1) / (2 * tt.k * tt.k) / 2
		near(t, "run length of a small k by Siegmund, relative", siegmund/tt.arl, 1, 0.03)
	}
	if h := Threshold(0.01, 1e8); !math.IsNaN(h) {
		t.Errorf("a threshold beyond what is solved is %v, want NaN", h)
	}
	for _, arl := range []float64{10, 100, 5e3, 52596, 1e6, 1e7} {
		near(t, "run length by its threshold, relative", ARL(0.5, Threshold(0.5, arl), 0)/arl, 1, 1e-4)
	}
}

// What the integral equation tells is what random numbers do.
func TestRunsOfRandomNumbers(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	const runs = 4000
	h := Threshold(0.5, 200)
	total := 0
	for range runs {
		var c CUSUM
		for max(c.High, c.Low) <= h {
			c.Observe(0, r.NormFloat64(), 0.5)
			total++
		}
	}
	mean := float64(total) / runs // its standard deviation is about that of an exponential
	near(t, "mean run", mean, 200, 4*200/math.Sqrt(runs))
}

// With the scatter known and independent values the false signals are those that were chosen,
// within three standard deviations of their number.
func TestFalseSignalsOfAKnownScatter(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	const arl, values = 1000.0, 1_000_000
	h := Threshold(0.5, arl)
	var c CUSUM
	signals := 0
	for range values {
		if c.Observe(0, r.NormFloat64(), 0.5); max(c.High, c.Low) > h {
			signals++
			c = CUSUM{}
		}
	}
	const want = values / arl
	near(t, "false signals", float64(signals), want, 3*math.Sqrt(want))
}

// With the scatter estimated there are not more false signals than chosen, by more than three
// standard deviations of their number; and fewer: a correlation below 0 counts as none, so
// that independent values are told to scatter by 1.9 % more than they do, and the inflation is
// that of long sums. The lower bounds are what was seen here, as a guard.
func TestFalseSignals(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	const arl, values = 1000.0, 400_000
	h := Threshold(0.5, arl)
	for _, tt := range []struct{ rho, least, most float64 }{{0, 0.65, 1.15}, {0.3, 0.3, 1.15}, {0.6, 0.1, 1.15}} {
		var c CUSUM
		var s Scale
		x, signals := 0.0, 0
		for i := range values {
			x = tt.rho*x + math.Sqrt(1-tt.rho*tt.rho)*r.NormFloat64()
			s.Observe(x)
			if i < 500 {
				continue
			}
			if c.Observe(0, x/s.Sigma(), 0.5); max(c.High, c.Low) > h {
				signals++
				c = CUSUM{}
			}
		}
		rate := float64(signals) * arl / values
		if rate < tt.least || rate > tt.most {
			t.Errorf("correlation %g: %.2f of the false signals chosen, want %g to %g", tt.rho, rate, tt.least, tt.most)
		}
	}
}

func TestScale(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	for _, rho := range []float64{0, 0.5, 0.8} {
		var s Scale
		x := 0.0
		var lag, sigma float64
		const after, to = 1000, 60_000
		for i := range to {
			x = rho*x + math.Sqrt(1-rho*rho)*r.NormFloat64()
			s.Observe(3 * x)
			if i >= after {
				lag += s.Lag() / (to - after)
				sigma += s.Sigma() / (to - after)
			}
		}
		near(t, "correlation", lag, rho, 0.03)
		near(t, "scatter", sigma, 3*math.Sqrt((1+rho)/(1-rho)), 0.12*3*math.Sqrt((1+rho)/(1-rho)))
	}
}

// x = 182 with U = 8 beside 195 with U = 9.
func TestScores(t *testing.T) {
	near(t, "E_n", En(182, 195, 8, 9), -1.08, 0.005)
	near(t, "zeta", Zeta(182, 195, 4, 4.5), -2.16, 0.005)
}

func BenchmarkObserve(b *testing.B) {
	var c CUSUM
	var s Scale
	for b.Loop() {
		s.Observe(0.3)
		c.Observe(0, 0.3, 0.5)
	}
}

func BenchmarkThreshold(b *testing.B) {
	for b.Loop() {
		Threshold(0.5, 52596)
	}
}
