package loads

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// sampled is what many draws of a model's output tell.
type sampled struct {
	mean, sd float64
	lo, hi   float64 // ends of the probabilistically symmetric 95 % interval
	y        []float64
}

// drawn propagates distributions by n draws of the model (JCGM 101:2008, clause 7).
func drawn(n int, seed uint64, model func(rng *rand.Rand) float64) sampled {
	rng := rand.New(rand.NewPCG(seed, 101))
	s := sampled{y: make([]float64, n)}
	for i := range s.y {
		s.y[i] = model(rng)
		s.mean += s.y[i]
	}
	s.mean /= float64(n)
	for _, y := range s.y {
		s.sd += (y - s.mean) * (y - s.mean)
	}
	s.sd = math.Sqrt(s.sd / float64(n-1))
	slices.Sort(s.y)
	s.lo, s.hi = s.y[int(0.025*float64(n))], s.y[int(0.975*float64(n))]
	return s
}

// within is the fraction of the draws within U of y.
func (s *sampled) within(y, U float64) float64 {
	from, _ := slices.BinarySearch(s.y, y-U)
	to, _ := slices.BinarySearch(s.y, y+U)
	return float64(to-from) / float64(len(s.y))
}

// tolerance is that of a standard uncertainty given with two digits, u = c·10^l with c
// from 10 to 99: half of 10^l (JCGM 101:2008, 7.9.2).
func tolerance(u float64) float64 {
	return math.Pow(10, math.Floor(math.Log10(u))-1) / 2
}

func normal(rng *rand.Rand) float64 { return rng.NormFloat64() }

// rectangular has unit standard deviation.
func rectangular(rng *rand.Rand) float64 { return math.Sqrt(3) * (2*rng.Float64() - 1) }

// The additive model of JCGM 101:2008, 9.2: Y = X1 + X2 + X3 + X4, of which the law of
// propagation finds u, and the draws the interval. Its tables 2 to 4 have the intervals
// ±3.92 for four normal inputs of unit standard uncertainty, ±3.88 for four rectangular ones,
// and ±17.0 where one of those has ten times the uncertainty, where ±1.96·u is ±19.9.
func TestSamplerOnTheAdditiveModel(t *testing.T) {
	for _, tt := range []struct {
		name           string
		draw           func(*rand.Rand) float64
		last, u, ends  float64
		digit, propped float64 // half of the last printed digit; ±1.96·u
	}{
		{"normal", normal, 1, 2.00, 3.92, 0.005, 3.92},
		{"rectangular", rectangular, 1, 2.00, 3.88, 0.005, 3.92},
		{"rectangular, one of ten", rectangular, 10, 10.15, 17.0, 0.05, 19.9},
	} {
		t.Run(tt.name, func(t *testing.T) {
			var parts [4]float64
			for i, u := range []float64{1, 1, 1, tt.last} {
				parts[i], _ = contribution(0, u, -u, nil, nil)
			}
			u := math.Sqrt(sumOfSquares(parts[:]))
			const n = 300_000
			s := drawn(n, 9, func(rng *rand.Rand) float64 {
				return tt.draw(rng) + tt.draw(rng) + tt.draw(rng) + tt.last*tt.draw(rng)
			})
			se := tt.u / math.Sqrt(n)
			near(t, "propagated u", u, tt.u, 0.005)
			near(t, "propagated ends", 1.96*u, tt.propped, 10*tt.digit)
			near(t, "mean", s.mean, 0, 4*se)
			near(t, "standard deviation", s.sd, u, 3*se)
			// The density at the ends is at least 0.029/u: a quantile's standard error is
			// √(0.025·0.975/n) over it, of u; 0.058/u for the normal.
			end := tt.digit + 3*math.Sqrt(0.025*0.975)/0.058*se
			near(t, "lower end", s.lo, -tt.ends, end)
			near(t, "upper end", s.hi, tt.ends, end)
		})
	}
}

// GUM's example of correlated inputs (JCGM 100:2008, H.2): resistance, reactance and
// impedance from five simultaneous readings of voltage, current and phase. The inputs are
// brought to independent causes, of which each moves all three, as the errors of a matched
// pair are; the results and what they have in common then follow from the causes. Expected
// are the printed values of tables H.3 and H.4, from unrounded means: R 127.732 ± 0.071,
// X 219.847 ± 0.295, Z 254.260 ± 0.236 ohm; r(R, X) −0.588, r(R, Z) −0.485, r(X, Z) 0.993
// (from memory). That of X is 0.2956, and so taken to one unit of the last digit. As
// independent, by hand √((u_V/V)² + (u_I/I)² + (u_φ tan φ)²)·R and likewise, they are
// 0.1945, 0.2009 and 0.2041 ohm.
func TestCorrelatedInputs(t *testing.T) {
	readings := [3][5]float64{
		{5.007, 4.994, 5.005, 4.990, 4.999},
		{19.663e-3, 19.639e-3, 19.640e-3, 19.685e-3, 19.678e-3},
		{1.0456, 1.0438, 1.0468, 1.0428, 1.0433},
	}
	results := [3]func(v [3]float64) float64{
		func(v [3]float64) float64 { return v[0] / v[1] * math.Cos(v[2]) },
		func(v [3]float64) float64 { return v[0] / v[1] * math.Sin(v[2]) },
		func(v [3]float64) float64 { return v[0] / v[1] },
	}
	mean, cov := momentsOf(readings)
	alone := cov
	for i := range 3 {
		for j := range 3 {
			if i != j {
				alone[i][j] = 0
			}
		}
	}
	for _, tt := range []struct {
		name string
		cov  [3][3]float64
		u    [3]float64
		r    [3]float64 // of R and X, R and Z, X and Z; 9 where none is published
		tol  float64
	}{
		{"correlated", cov, [3]float64{0.071, 0.295, 0.236}, [3]float64{-0.588, -0.485, 0.993}, 1e-3},
		{"as independent", alone, [3]float64{0.1945, 0.2009, 0.2041}, [3]float64{9, 9, 9}, 1e-4},
	} {
		t.Run(tt.name, func(t *testing.T) {
			var parts [3][]float64
			for _, cause := range causesOf(tt.cov) {
				for k, f := range results {
					up, down := mean, mean
					for i := range mean {
						up[i] += cause[i]
						down[i] -= cause[i]
					}
					c, err := contribution(f(mean), f(up), f(down), nil, nil)
					if err != nil {
						t.Fatal(err)
					}
					parts[k] = append(parts[k], c)
				}
			}
			for k, want := range []float64{127.732, 219.847, 254.260} {
				near(t, "result", results[k](mean), want, 1e-3)
				near(t, "uncertainty", math.Sqrt(sumOfSquares(parts[k])), tt.u[k], tt.tol)
			}
			for n, pair := range [][2]int{{0, 1}, {0, 2}, {1, 2}} {
				a, b := parts[pair[0]], parts[pair[1]]
				r := (a[0]*b[0] + a[1]*b[1] + a[2]*b[2]) / math.Sqrt(sumOfSquares(a)*sumOfSquares(b))
				if tt.r[n] != 9 {
					near(t, "correlation", r, tt.r[n], 1e-3)
				}
			}
		})
	}
}

// momentsOf returns the means of simultaneous readings and the covariances of the means
// (JCGM 100:2008, 4.2.3 and equation (17)).
func momentsOf(x [3][5]float64) (mean [3]float64, cov [3][3]float64) {
	for i := range x {
		for _, v := range x[i] {
			mean[i] += v / 5
		}
	}
	for i := range x {
		for j := range x {
			for k := range 5 {
				cov[i][j] += (x[i][k] - mean[i]) * (x[j][k] - mean[j]) / (5 * 4)
			}
		}
	}
	return mean, cov
}

// causesOf splits covariances into independent causes of unit variance: the columns of
// their Cholesky factor, each what one cause does to the three inputs.
func causesOf(cov [3][3]float64) (cause [3][3]float64) {
	for k := range 3 {
		pivot := math.Sqrt(cov[k][k])
		for i := k; i < 3; i++ {
			cause[k][i] = cov[i][k] / pivot
		}
		for i := k; i < 3; i++ {
			for j := k; j < 3; j++ {
				cov[i][j] -= cause[k][i] * cause[k][j]
			}
		}
	}
	return cause
}
