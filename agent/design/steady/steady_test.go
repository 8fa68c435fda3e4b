package steady

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// The recursion by hand: v = d = 0 and the mean at 10.0 to begin with.
func TestRecursion(t *testing.T) {
	var f Filter
	f.Observe(10)
	want := []float64{1.8000, 0.7943, 0.6780, 0.6429, 1.0143, 0.7504, 1.2424, 2.6120, 4.9169, 6.9287, 10.0603}
	for i, x := range []float64{10.2, 9.9, 10.1, 10.0, 9.8, 10.1, 10.3, 10.9, 11.4, 12.1, 12.6} {
		f.Observe(x)
		if r, known := f.R(); !known || math.Abs(r-want[i]) > 5e-5 {
			t.Errorf("value %d: R = %v, want %v", i+1, r, want[i])
		}
	}
	if !f.Moves {
		t.Error("a ramp is taken for steady")
	}
}

// Quantiles of R under steady white noise, by 120,000 values of a generator of our own.
func TestQuantiles(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 1))
	var f Filter
	var all []float64
	beyond := 0
	for i := range 121_000 {
		f.Observe(r.NormFloat64())
		if x, known := f.R(); known && i >= 1000 {
			all = append(all, x)
			if x > Rejects {
				beyond++
			}
		}
	}
	slices.Sort(all)
	for q, want := range map[float64]float64{0.05: 0.77, 0.5: 1.00, 0.9: 1.32, 0.95: 1.44, 0.99: 1.73} {
		if got := all[int(q*float64(len(all)))]; math.Abs(got-want) > 0.025*want {
			t.Errorf("quantile %v of R is %v, want %v", q, got, want)
		}
	}
	if part := float64(beyond) / float64(len(all)); part > 1e-3 {
		t.Errorf("R is beyond %v in a part %v of steady values, want less than 0.001", Rejects, part)
	}
}

func TestStuckTellsNothing(t *testing.T) {
	var f Filter
	for range 20 {
		f.Observe(3)
	}
	if r, known := f.R(); known {
		t.Errorf("R of a stuck signal is %v, want not known", r)
	}
}

// What a signal did before it got stuck is not told for ever.
func TestStuckAfterARampTellsNothing(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 4))
	var f Filter
	for i := range 60 {
		f.Observe(10 + 0.5*float64(i) + 0.1*r.NormFloat64())
	}
	if x, known := f.R(); !known || !f.Moves {
		t.Errorf("a ramp: R = %v, known %v, moves %v", x, known, f.Moves)
	}
	for range 1 + stuck {
		f.Observe(40)
	}
	if x, known := f.R(); known || f.Moves {
		t.Errorf("stuck: R = %v, known %v, moves %v; want neither", x, known, f.Moves)
	}
	for range 60 {
		f.Observe(40 + 0.1*r.NormFloat64())
	}
	if x, known := f.R(); !known || x > Rejects {
		t.Errorf("moving again: R = %v, known %v", x, known)
	}
}

// A minute that is no number is not steady, and is forgotten.
func TestGateBeginsAnewAfterNoNumber(t *testing.T) {
	for _, bad := range []Sample{{"flow", math.NaN(), 100}, {"flow", 10, math.Inf(1)}} {
		var g Gate
		observe(&g, 5, slices.Repeat([]float64{10, 10.001}, 10)...)
		g.Observe(10, 5, bad, Sample{"inlet", 50, 7})
		if g.Now.Steady || g.Now.Worst != "flow" {
			t.Errorf("%v: %+v, want flow not steady", bad, g.Now)
		}
		observe(&g, 5, slices.Repeat([]float64{10, 10.001}, 10)...)
		if x, known := g.Variables[0].Filter.R(); !g.Now.Steady || !known || math.IsNaN(x) {
			t.Errorf("%v: afterwards %+v, R = %v", bad, g.Now, x)
		}
	}
}

// y at unit steps: b = 0.045455, s_b = 0.0090909, t = 5 against 2.306.
func TestSlope(t *testing.T) {
	l := Fit([]float64{20.1, 20.0, 20.2, 20.1, 20.3, 20.2, 20.4, 20.3, 20.5, 20.4})
	if math.Abs(l.Slope-0.045455) > 5e-7 || math.Abs(l.Error-0.0090909) > 5e-8 || math.Abs(l.T()-5) > 5e-4 {
		t.Errorf("%+v, t = %v", l, l.T())
	}
	if !l.Significant(0.05) {
		t.Error("not significant")
	}
	if got := student(8, 0.05); math.Abs(got-2.306) > 5e-4 {
		t.Errorf("Student's t is %v, want 2.306", got)
	}
}

func observe(g *Gate, limit float64, values ...float64) {
	for _, x := range values {
		g.Observe(10, limit, Sample{"flow", x, 100}, Sample{"inlet", 50, 7})
	}
}

func TestGate(t *testing.T) {
	noise := rand.New(rand.NewPCG(2, 2))
	course := func(n int, rise float64) (all []float64) {
		for i := range n {
			all = append(all, 10+rise*float64(i)+0.01*noise.NormFloat64())
		}
		return all
	}
	for _, tt := range []struct {
		name   string
		values []float64
		limit  float64
		want   bool
	}{
		{"steady", course(30, 0), 5, true},
		{"a ramp that matters", course(30, 0.02), 5, false},
		{"a ramp that does not matter", course(30, 0.02), 50, true},
		{"a step that matters", append(course(20, 0), 10.2, 10.2), 5, false},
		{"a step long ago", append(course(20, 0), course(40, 0)...), 5, true},
		{"stuck", slices.Repeat([]float64{10}, 20), 5, true},
	} {
		var g Gate
		observe(&g, tt.limit, tt.values...)
		if g.Now.Steady != tt.want {
			t.Errorf("%s: %+v", tt.name, g.Now)
		}
		if g.Now.Worst != "flow" && tt.name != "stuck" {
			t.Errorf("%s: the worst variable is %q, want flow", tt.name, g.Now.Worst)
		}
	}
}

// Steady noise about the limit is hardly ever called unsteady.
func TestGateOnNoise(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 3))
	var g Gate
	wrong := 0
	const n = 20_000
	for range n {
		g.Observe(10, 4, Sample{"flow", 10 + 0.01*r.NormFloat64(), 100})
		if !g.Now.Steady {
			wrong++
		}
	}
	if wrong > n/1000 {
		t.Errorf("%d of %d minutes of noise are unsteady, want at most one in a thousand", wrong, n)
	}
}

func BenchmarkGate(b *testing.B) {
	var g Gate
	x := 0.0
	for b.Loop() {
		x = 0.01 - x
		g.Observe(10, 5, Sample{"flow", 10 + x, 100}, Sample{"inlet", 50 + x, 7}, Sample{"outlet", 40, 7})
	}
}
