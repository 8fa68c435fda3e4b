package air

import "math"

const (
	triplePoint = 273.16 // K, where the two saturation equations meet
	coldest     = 173.15 // K, lower end of the equation over ice
	hottest     = 473.15 // K, upper end of the equation over water
)

// vapourLine holds ln p = c[0]/T + c[1] + c[2] T + c[3] T² + c[4] T³ + c[5] T⁴ + c[6] ln T with
// p in Pa and T in K: R. W. Hyland and A. Wexler, ASHRAE Transactions 89(2A), 1983,
// 500-519, as in ASHRAE Handbook Fundamentals 2017, chapter 1, equations 5 (ice,
// 173.15 K to the triple point) and 6 (liquid, to 473.15 K). Coefficients from memory; the
// tests hold them to psychrolib within 1e-12, and to IAPWS-IF97 and IAPWS R14-08 within 4e-4.
type vapourLine [7]float64

var (
	overIce   = vapourLine{-5.6745359e3, 6.3925247, -9.677843e-3, 6.2215701e-7, 2.0747825e-9, -9.484024e-13, 4.1635019}
	overWater = vapourLine{-5.8002206e3, 1.3914993, -4.8640239e-2, 4.1764768e-5, -1.4452093e-8, 0, 6.5459673}
)

// log returns ln p and its derivative by T.
func (c *vapourLine) log(T float64) (value, slope float64) {
	value = c[0]/T + c[1] + T*(c[2]+T*(c[3]+T*(c[4]+T*c[5]))) + c[6]*math.Log(T)
	slope = (c[6]-c[0]/T)/T + c[2] + T*(2*c[3]+T*(3*c[4]+T*4*c[5]))
	return value, slope
}

// saturationPressure is in Pa, over ice up to the triple point and over water above.
func saturationPressure(T float64) float64 {
	line := &overWater
	if T <= triplePoint {
		line = &overIce
	}
	value, _ := line.log(T)
	return math.Exp(value)
}

var (
	leastPressure  = saturationPressure(coldest)     // 1.4 mPa
	triplePressure = saturationPressure(triplePoint) // 611.657 Pa
)

// saturationTemperature is the dew or frost point in K at the partial pressure p of vapour in
// Pa, and 0 below the range of the equations. Newton's method in ln p; two
// equations join within 1.3e-8 at the triple point, so does this.
func saturationTemperature(p float64) float64 {
	if !(p >= leastPressure) {
		return 0
	}
	line, heat := &overWater, 5420.0 // latent heat over the gas constant, for the first guess
	if p <= triplePressure {
		line, heat = &overIce, 6147
	}
	log := math.Log(p)
	T := 1 / (1/triplePoint - (log-math.Log(triplePressure))/heat)
	for range 20 {
		value, slope := line.log(T)
		step := (value - log) / slope
		T -= step
		if math.Abs(step) < 1e-13*T {
			break
		}
	}
	return T
}
