package loads

import (
	"math"
	"math/rand/v2"
	"testing"
)

// straight are n readings at steps of dt on a line of slope b, each with an error of its
// own.
func straight(n int, dt, b float64, noise func() float64) []point {
	points := make([]point, n)
	for i := range points {
		points[i] = point{float64(i) * dt, 350 + b*float64(i)*dt + noise(), 1}
	}
	return points
}

func TestLineThroughPoints(t *testing.T) {
	l := fit(straight(60, 10, 2e-3, func() float64 { return 0 }))
	near(t, "rate", l.Rate, 2e-3, 1e-15)
	near(t, "mean", l.Mean, 350+2e-3*295, 1e-12)
	near(t, "span", l.Span, 590, 0)
	near(t, "error", l.Error, 0, 1e-13)
	// 0, 1, 0 at 0, 1, 2 s by hand: slope 0, Σr² = 2/3, Σ(t − t̄)² = 2
	l = fit([]point{{0, 0, 1}, {1, 1, 1}, {2, 0, 1}})
	near(t, "error by hand", l.Error, math.Sqrt(2./3/1/2), 1e-15)
	// a point of double weight is two points
	l = fit([]point{{0, 1, 2}, {1, 3, 1}, {4, 2, 1}})
	twice := fit([]point{{0, 1, 1}, {0, 1, 1}, {1, 3, 1}, {4, 2, 1}})
	near(t, "rate by weight", l.Rate, twice.Rate, 1e-15)
	near(t, "mean by weight", l.Mean, twice.Mean, 1e-15)
	for n, points := range [][]point{nil, {{5, 300, 1}}, {{5, 300, 1}, {6, 302, 1}}} {
		l := fit(points)
		if l.Points != n || l.Error != 0 || math.IsNaN(l.Rate) || n == 2 && l.Rate != 2 {
			t.Errorf("%d points: %+v", n, l)
		}
	}
}

// The standard error of N readings at steps of dt is s·√(12/(N(N² − 1)))/dt, with s the
// scatter about the line. What it covers is that of Student's t with N − 2 degrees of
// freedom (JCGM 100:2008, table G.2): of 58, 68.3 % within 1.01 and 95.45 % within 2.05; of 3,
// 68.27 % within 1.20 and 95.45 % within 3.31.
func TestStandardErrorOfTheRate(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 2))
	const sigma, dt, runs = 0.05, 10, 20000
	for _, tt := range []struct {
		n        int
		one, two float64
	}{{60, 1.01, 2.05}, {5, 1.20, 3.31}} {
		n := float64(tt.n)
		want := sigma * math.Sqrt(12/(n*(n*n-1))) / dt
		var inOne, inTwo, square, errors float64
		for range runs {
			l := fit(straight(tt.n, dt, 1e-3, func() float64 { return sigma * random.NormFloat64() }))
			off := math.Abs(l.Rate - 1e-3)
			if off <= tt.one*l.Error {
				inOne++
			}
			if off <= tt.two*l.Error {
				inTwo++
			}
			square += off * off
			errors += l.Error * l.Error
		}
		near(t, "scatter of the rate", math.Sqrt(square/runs), want, 0.02*want)
		near(t, "root mean square of its standard error", math.Sqrt(errors/runs), want, 0.02*want)
		near(t, "covered by one", inOne/runs, 0.6827, 0.01)
		near(t, "covered by two", inTwo/runs, 0.9545, 0.005)
	}
}

// Numbers in steps of 0.1 K of a temperature that creeps by less than a step in the span:
// the line has no scatter, and is still not taken to be certain.
func TestRateHiddenInTheResolution(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	tag := Tag{Resolution: 0.1}
	var off, said float64
	const runs = 5000
	for range runs {
		start, b := random.Float64(), (random.Float64()-0.5)*2e-4
		points := straight(60, 10, b, func() float64 { return 0 })
		for i := range points {
			points[i].Value = math.Round((points[i].Value+start)*10) / 10
		}
		l := fit(points)
		off += (l.Rate - b) * (l.Rate - b)
		u := l.uncertainty(&tag)
		said += u * u
	}
	off, said = math.Sqrt(off/runs), math.Sqrt(said/runs)
	if !(off <= said && said <= 2*off) {
		t.Errorf("rates are off by %g K/s, their uncertainty says %g; want it no less, and not twice as much", off, said)
	}
}
