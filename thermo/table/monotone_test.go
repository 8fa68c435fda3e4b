package table

import (
	"math"
	"math/rand/v2"
	"testing"
)

// greatest returns how far the cubics through f at the given x are from f, at worst.
func greatest(f func(float64) float64, x []float64) (worst float64) {
	y := make([]float64, len(x))
	for k := range x {
		y[k] = f(x[k])
	}
	c := interpolate(x, y)
	for k := range c {
		for i := 1; i < 20; i++ {
			t := (x[k+1] - x[k]) * float64(i) / 20
			worst = max(worst, math.Abs(c[k].at(t)-f(x[k]+t)))
		}
	}
	return worst
}

// grid spreads n+1 places over [0, 1]; crooked ones lie by turns 0.4 and 0.6 of the mean
// distance apart from their neighbours.
func grid(n int, crooked bool) []float64 {
	x := make([]float64, n+1)
	for k := range x {
		x[k] = float64(k) / float64(n)
		if crooked && k%2 == 1 {
			x[k] -= 0.2 / float64(n)
		}
	}
	return x
}

// With 16 times as many stretches the error falls by 16³ where the function has no
// extremum, and by 16² where it has one, whether the rows lie alike or not. An extremum is
// put to many places between the rows, of which the worst counts.
func TestOrderOfConvergence(t *testing.T) {
	minima := func(at float64) func(float64) float64 {
		return func(x float64) float64 { return (x - at) * (x - at) }
	}
	same := func(f func(float64) float64) func(float64) func(float64) float64 {
		return func(float64) func(float64) float64 { return f }
	}
	for _, tt := range []struct {
		name   string
		family func(float64) func(float64) float64
		order  float64
	}{
		{"exponential", same(math.Exp), 3},
		{"line and poles", same(func(x float64) float64 { return 1 + x + 0.3*x*x*x - 0.05/((x+1)*(x+1)) }), 3},
		{"with a minimum", minima, 2},
	} {
		for _, crooked := range []bool{false, true} {
			var first, last float64
			for i := range 64 {
				f := tt.family(0.4 + float64(i)/512)
				first, last = max(first, greatest(f, grid(16, crooked))), max(last, greatest(f, grid(256, crooked)))
			}
			order := math.Log2(first/last) / 4 // four halvings
			t.Logf("%s, crooked %v: error %.2g with 16 stretches, %.2g with 256, order %.2f", tt.name, crooked, first, last, order)
			if !(order > tt.order-0.1) {
				t.Errorf("%s, crooked %v: order %.2f, want %g", tt.name, crooked, order, tt.order)
			}
		}
	}
}

// A straight line and a parabola without an extremum are met exactly, but for the rounding.
func TestParabolaIsExact(t *testing.T) {
	for name, f := range map[string]func(float64) float64{
		"line":     func(x float64) float64 { return 3 - 2*x },
		"parabola": func(x float64) float64 { return 1 + x + x*x/2 },
	} {
		if worst := greatest(f, grid(7, true)); !(worst <= 1e-14) {
			t.Errorf("%s: off by %g", name, worst)
		}
	}
}

// Whatever the rows, no cubic leaves the interval between its two ends, and its slope is
// that of its neighbour where they meet.
func TestNoOvershoot(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for range 2000 {
		n := 2 + r.IntN(8)
		x, y := make([]float64, n), make([]float64, n)
		for k := range x {
			x[k] = 300 + float64(k)
			if k > 0 {
				x[k] = x[k-1] + math.Exp(8*r.Float64()-4)
			}
			y[k] = math.Exp(6 * r.NormFloat64())
			if k > 0 && r.IntN(4) == 0 {
				y[k] = y[k-1]
			}
		}
		c := interpolate(x, y)
		for k := range c {
			h := x[k+1] - x[k]
			lo, hi := min(y[k], y[k+1]), max(y[k], y[k+1])
			for i := range 41 {
				if v := c[k].at(h * float64(i) / 40); !(v >= lo-1e-12*hi && v <= hi+1e-12*hi) {
					t.Fatalf("rows %v %v: %g between %g and %g", x, y, v, lo, hi)
				}
			}
			if k > 0 {
				a, b := c[k-1].slope(x[k]-x[k-1]), c[k].slope(0)
				if scale := max(y[k-1], y[k]) / (x[k] - x[k-1]); !(math.Abs(a-b) <= 1e-12*(scale+math.Abs(b))) {
					t.Fatalf("rows %v %v: slope %g before and %g after row %d", x, y, a, b, k+1)
				}
			}
		}
	}
}
