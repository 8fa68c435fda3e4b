package exchanger

import "math"

// LMTD is the logarithmic mean of the two differences of temperature at the ends, K.
func LMTD(d1, d2 float64) float64 {
	if math.Abs(d1/d2-1) < 1e-6 {
		return (d1 + d2) / 2
	}
	return (d1 - d2) / math.Log(d1/d2)
}

// Correction is the factor F on the LMTD of counterflow for n shells of an even number of tube
// passes, by P = (t_out − t_in)/(T_in − t_in) and R = (T_in − T_out)/(t_out − t_in). R. A.
// Bowman, A. C. Mueller and W. M. Nagle, Trans. ASME 62 (1940). It is NaN where no such
// exchanger exists.
func Correction(p, r float64, n int) float64 {
	if n > 1 {
		p = ofOneShell(p, r, n)
	}
	if math.Abs(r-1) < 1e-9 {
		s := math.Sqrt2
		return s * p / (1 - p) / math.Log((2/p-2+s)/(2/p-2-s))
	}
	s := math.Hypot(r, 1)
	return s / (r - 1) * math.Log((1-p)/(1-p*r)) / math.Log((2/p-1-r+s)/(2/p-1-r-s))
}

// ofOneShell is the P of each of n shells that together have p.
func ofOneShell(p, r float64, n int) float64 {
	if math.Abs(r-1) < 1e-9 {
		return p / (float64(n) - p*float64(n-1))
	}
	w := math.Pow((1-p*r)/(1-p), 1/float64(n))
	return (1 - w) / (r - w)
}
