package drift

import "math"

// En is E_n = (x − ref)/√(U² + Uref²) with expanded uncertainties of coverage factor 2: a
// deviation beyond ±1 is significant (ISO 13528; ISO/IEC 17043).
func En(x, ref, expanded, expandedRef float64) float64 {
	return (x - ref) / math.Hypot(expanded, expandedRef)
}

// Zeta is the same quotient with standard uncertainties: beyond ±2 is significant (ISO
// 13528).
func Zeta(x, ref, u, uRef float64) float64 { return (x - ref) / math.Hypot(u, uRef) }

// Limits are those of an EWMA of values with standard deviation sigma about z0, after n
// values, L of its standard deviations wide: z0 ± L·s·√(λ/(2 − λ)·[1 − (1 − λ)^(2n)]); for
// n = 0 those after many.
func Limits(z0, sigma, lambda, L float64, n int) (low, high float64) {
	f := lambda / (2 - lambda)
	if n > 0 {
		f *= 1 - math.Pow(1-lambda, 2*float64(n))
	}
	w := L * sigma * math.Sqrt(f)
	return z0 - w, z0 + w
}
