package table

// hull returns the Bernstein coefficients over [lo, hi] of a polynomial in t, lowest power
// first. The polynomial stays between the least and the greatest of them, and the outermost
// two are its values at the ends.
func hull(c []float64, lo, hi float64) []float64 {
	b := append([]float64(nil), c...)
	n := len(b) - 1
	for k := range n { // Taylor's shift to lo, by Horner's rule
		for i := n - 1; i >= k; i-- {
			b[i] += lo * b[i+1]
		}
	}
	w := 1.0
	for k := range b {
		b[k] *= w / binomial(n, k)
		w *= hi - lo
	}
	for k := 1; k <= n; k++ { // sums of sums: from powers to Bernstein's basis
		for i := n; i >= k; i-- {
			b[i] += b[i-1]
		}
	}
	return b
}

func binomial(n, k int) float64 {
	out := 1.0
	for i := range k {
		out *= float64(n-i) / float64(i+1)
	}
	return out
}

const maxHalvings = 40

// above proves that the polynomial c in t, lowest power first, is above zero all over [lo,
// hi], and returns where it is not. Where every Bernstein coefficient is above zero, so is
// the polynomial; where an end is not, neither is it; in between the interval is halved. A
// polynomial that comes within rounding of zero counts as not above it.
func above(c []float64, lo, hi float64) (where float64, ok bool) {
	return aboveIn(hull(c, lo, hi), lo, hi, maxHalvings)
}

func aboveIn(b []float64, lo, hi float64, halvings int) (where float64, ok bool) {
	least := b[0]
	for _, v := range b {
		if !(v >= least) { // also where v is not a number
			least = v
		}
	}
	switch {
	case least > 0:
		return 0, true
	case !(b[0] > 0):
		return lo, false
	case !(b[len(b)-1] > 0), halvings == 0:
		return hi, false
	}
	left, right := halve(b)
	mid := (lo + hi) / 2
	if where, ok = aboveIn(left, lo, mid, halvings-1); !ok {
		return where, false
	}
	return aboveIn(right, mid, hi, halvings-1)
}

// halve splits Bernstein coefficients at the middle of their interval (de Casteljau).
func halve(b []float64) (left, right []float64) {
	n := len(b)
	left, right = make([]float64, n), append([]float64(nil), b...)
	for k := range n {
		left[k] = right[0]
		for i := range n - 1 - k {
			right[i] = (right[i] + right[i+1]) / 2
		}
	}
	return left, right
}

// product multiplies two polynomials, lowest power first.
func product(a, b []float64) []float64 {
	out := make([]float64, len(a)+len(b)-1)
	for i, x := range a {
		for j, y := range b {
			out[i+j] += x * y
		}
	}
	return out
}

// ideal is cp ρ T − p in units of p, which has the sign of cv = cp − p/(ρT): c and rho are
// polynomials in t, where T = origin + t.
func ideal(c, rho []float64, origin, p float64) []float64 {
	out := product(product(c, rho), []float64{origin / p, 1 / p})
	out[0]--
	return out
}
