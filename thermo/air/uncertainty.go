package air

import "math"

// Uncertainty follows by state what the relations are off by against the real mixture of
// IAPWS G8-10. In relative terms, with x the mole fraction and pw = x p the partial
// pressure of vapour, t in °C and p in units of 100 kPa:
//
//	dry air:  cp  |0.19 % − 0.0030 % t − 3.6e-5 % t² − 0.20 % p (273.15/T)^2.5|
//	          ρ   0.003 % + 0.058 % p e^(−0.02 t) + 0.035 % p
//	vapour:   cp  W/((1+W) cp) · (0.021 J/(kg K Pa) pw (293.15/T)^10 + 0.32 (t − 20) for t > 20)
//	          ρ   x pw 5.5e-7/Pa (293.15/T)^5
//
// The sum of the two and 0.1 % of cp for the reference itself bounds the deviation everywhere in
// the range, which the tests hold it to; as it may be anything up to that, the standard
// uncertainty is the bound over √3. The uncertainty of the humidity is not in it.
func (m *moist) Uncertainty(T, p float64) (cp, density float64) {
	t, bars, pw := T-zero, p/1e5, m.share*p
	cold := math.Exp(-0.02 * t)
	cp = 1e-3 + math.Abs(1.9e-3-t*(3.0e-5+3.6e-7*t)-2.0e-3*bars*math.Pow(zero/T, 2.5))
	cp += m.massCpWet * (0.021*pw*math.Pow(293.15/T, 10) + 0.32*max(t-20, 0))
	density = 3e-5 + bars*(5.8e-4*cold+3.5e-4) + m.share*pw*5.5e-7*math.Pow(293.15/T, 5)
	return cp / math.Sqrt(3), density / math.Sqrt(3)
}
