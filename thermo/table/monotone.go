package table

import "math"

// cubic is a polynomial in the distance from the start of its stretch, lowest power first.
type cubic [4]float64

func (c *cubic) at(t float64) float64    { return c[0] + t*(c[1]+t*(c[2]+t*c[3])) }
func (c *cubic) slope(t float64) float64 { return c[1] + t*(2*c[2]+t*3*c[3]) }

// integral from 0 to t.
func (c *cubic) integral(t float64) float64 {
	return t * (c[0] + t*(c[1]/2+t*(c[2]/3+t*(c[3]/4))))
}

// interpolate returns one cubic a stretch between neighbouring x, which rise. They meet
// with equal slope, and rise or fall wherever the values do: no cubic leaves the interval
// between the two values at its ends. Two values make a straight line.
//
// The slope at an inner value is that of the parabola through it and its neighbours, at an
// end that of the parabola through the last three; it is cut to three times the lesser of
// the neighbouring secants, and to 0 where those differ in sign, which is enough to be
// monotone (F. N. Fritsch, R. E. Carlson, Monotone Piecewise Cubic Interpolation, SIAM J.
// Numer. Anal. 17 (1980) 238-246). Smooth data are met to the third order of the distance,
// at an extremum to the second.
func interpolate(x, y []float64) []cubic {
	d := slopes(x, y)
	out := make([]cubic, len(x)-1)
	for k := range out {
		h := x[k+1] - x[k]
		s := (y[k+1] - y[k]) / h
		out[k] = cubic{y[k], d[k], (3*s - 2*d[k] - d[k+1]) / h, (d[k] + d[k+1] - 2*s) / (h * h)}
	}
	return out
}

// parabolas returns one parabola a stretch, through the values y at its ends and with the
// area by which the integrals at the ends differ.
func parabolas(x, y, integrals []float64) []cubic {
	out := make([]cubic, len(x)-1)
	for k := range out {
		h := x[k+1] - x[k]
		bulge := (integrals[k+1]-integrals[k])/h - (y[k]+y[k+1])/2 // mean of 6 u (1 − u), u from 0 to 1
		out[k] = cubic{y[k], (y[k+1] - y[k] + 6*bulge) / h, -6 * bulge / (h * h)}
	}
	return out
}

func slopes(x, y []float64) []float64 {
	n := len(x)
	secant := func(k int) float64 { return (y[k+1] - y[k]) / (x[k+1] - x[k]) }
	d := make([]float64, n)
	if n == 2 {
		d[0], d[1] = secant(0), secant(0)
		return d
	}
	for k := 1; k < n-1; k++ {
		h1, h2 := x[k]-x[k-1], x[k+1]-x[k]
		s1, s2 := secant(k-1), secant(k)
		d[k] = cut(cut((h2*s1+h1*s2)/(h1+h2), s1), s2)
	}
	d[0] = cut(endSlope(x[1]-x[0], x[2]-x[1], secant(0), secant(1)), secant(0))
	d[n-1] = cut(endSlope(x[n-1]-x[n-2], x[n-2]-x[n-3], secant(n-2), secant(n-3)), secant(n-2))
	return d
}

// endSlope is that of the parabola through the last three points: h1 and s1 are length and
// secant of the stretch at the end, h2 and s2 of the next.
func endSlope(h1, h2, s1, s2 float64) float64 {
	return ((2*h1+h2)*s1 - h1*s2) / (h1 + h2)
}

// cut limits a slope to the sign of a secant and to three times its size.
func cut(d, secant float64) float64 {
	if d == 0 || math.Signbit(d) != math.Signbit(secant) {
		return 0
	}
	return math.Copysign(min(math.Abs(d), 3*math.Abs(secant)), d)
}

// stretch returns the number of the stretch that x lies in; beyond either end it is the
// outermost. starts, which rise, are where the stretches begin.
func stretch(starts []float64, x float64) int {
	lo, hi := 0, len(starts)
	for hi-lo > 1 {
		mid := int(uint(lo+hi) / 2)
		if starts[mid] <= x {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo
}
