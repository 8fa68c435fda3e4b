package seawater

import "math"

// Uncertainty is the largest deviation found over √3, as the figure may be off by anything up
// to that. For cp that is 0.30 % up to 42 g/kg, from there rising to 0.55 % at 120 g/kg, and
// to 0.80 % there at 12 MPa. For density it is 0.055 % up to 42 g/kg and 40 °C, where TEOS-10 knows it, and beyond the 0.1 %
// that the authors of the correlation state. An uncertain salinity is not in it.
func (s *seawater) Uncertainty(T, p float64) (cp, density float64) {
	const open = 0.042 // kg/kg, the saltiest open sea
	cp, density = 3e-3, 5.5e-4
	if s.salinity > open {
		cp += 2.5e-3 * (1 + p/maxP) * (s.salinity - open) / (maxSalinity - open)
	}
	if s.salinity > open || T > 313.15 {
		density = 1e-3
	}
	return cp / math.Sqrt(3), density / math.Sqrt(3)
}
