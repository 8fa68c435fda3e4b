package oil

import "math"

// quadratic is cp in J/(kg K) as a polynomial in K, lowest power first.
type quadratic [3]float64

func (c *quadratic) at(T float64) float64       { return c[0] + T*(c[1]+T*c[2]) }
func (c *quadratic) integral(T float64) float64 { return T * (c[0] + T*(c[1]/2+T*c[2]/3)) }

const (
	btu     = 4186.8 // J/(kg K) of 1 Btu/(lb °F)
	absZero = 459.67 // °F from absolute zero to 0 °F
)

// ofFahrenheit is a + b t in Btu/(lb °F), t in °F.
func ofFahrenheit(a, b float64) quadratic {
	return quadratic{btu * (a - b*absZero), btu * b * 1.8}
}

// cragoe is C. S. Cragoe, Thermal Properties of Petroleum Products, NBS Miscellaneous
// Publication 97 (1929): cp = (0.388 + 0.00045 t)/√SG Btu/(lb °F), t in °F; 0 °F to 400 °F,
// specific gravity 0.75 to 0.96, said to be good for 4 % (from memory).
func cragoe(sg float64) quadratic {
	return ofFahrenheit(0.388/math.Sqrt(sg), 0.00045/math.Sqrt(sg))
}

const cragoeMinSG, cragoeMaxSG = 0.75, 0.96

// keslerLee is M. G. Kesler, B. I. Lee, Hydrocarbon Processing 55(3) (1976) 153, in SI as
// in M. R. Riazi, Characterization and Properties of Petroleum Fractions (ASTM MNL50,
// 2005): liquid up to a reduced temperature of 0.85.
func keslerLee(sg, kw float64) quadratic {
	a := 1000 * (1.4651 + 0.2302*kw)
	return quadratic{a * (0.306469 - 0.16734*sg), a * (0.001467 - 0.000551*sg)}
}

const keslerLeeReduced = 0.85

// api7D22 is API Technical Data Book, procedure 7D2.2: cp = A1 + A2 T + A3 T² in Btu/(lb
// °R), T in °R.
func api7D22(sg, kw float64) quadratic {
	w := 1 + 0.82463*kw
	a1 := -1.17126 + (0.023722+0.024907*sg)*kw + (1.14982-0.046535*kw)/sg
	a2 := 1e-4 * w * (1.12172 - 0.27634/sg)
	a3 := -1e-8 * w * (2.9027 - 0.70958/sg)
	return quadratic{btu * a1, btu * a2 * 1.8, btu * a3 * 1.8 * 1.8}
}

// fallonWatson is J. F. Fallon, K. M. Watson, National Petroleum News 36 (1944) R-372, from
// memory.
func fallonWatson(sg, kw float64) quadratic {
	api := 141.5/sg - 131.5
	k := 0.05*kw + 0.41
	return ofFahrenheit((0.355+0.128e-2*api)*k, (0.503+0.117e-2*api)*1e-3*k)
}

// boilingPoint is the mean average one in K that the Watson factor stands for, kw = (1.8
// Tb)^(1/3)/SG.
func boilingPoint(sg, kw float64) float64 { return math.Pow(kw*sg, 3) / 1.8 }

// criticalTemperature in K is that of Kesler and Lee (1976, from memory).
func criticalTemperature(sg, kw float64) float64 {
	tb := boilingPoint(sg, kw)
	return 189.8 + 450.6*sg + (0.4244+0.1174*sg)*tb + (0.1441-1.0069*sg)*1e5/tb
}

// criticalPressure in Pa is that of Kesler and Lee (1976, from memory).
func criticalPressure(sg, kw float64) float64 {
	tb := boilingPoint(sg, kw)
	return 1e5 * math.Exp(5.689-0.0566/sg-
		(0.43639+4.1216/sg+0.21343/(sg*sg))*1e-3*tb+
		(0.47579+1.182/sg+0.15302/(sg*sg))*1e-6*tb*tb-
		(2.4505+9.9099/(sg*sg))*1e-10*tb*tb*tb)
}
