package water

import (
	"math"

	"heatreeve/thermo"
)

// Limits of the saturation equation: R7-97(2012), section 8.
const (
	lowestTemperature   = 273.15   // K
	criticalTemperature = 647.096  // K
	criticalPressure    = 22.064e6 // Pa
)

// lowestSaturation is the saturation pressure at 273.15 K, 611.213 Pa.
var lowestSaturation = saturationPressure(lowestTemperature)

// saturation holds n1 to n10 of the saturation equation: R7-97(2012), table 34,
// for equations 30 (pressure) and 31 (temperature), 273.15 K to 647.096 K.
// Checked against every value of tables 35 and 36.
var saturation = [...]float64{
	1167.0521452767, -724213.16703206, -17.073846940092, 12020.82470247, -3232555.0322333,
	14.91510861353, -4823.2657361591, 405113.40542057, -0.23855557567849, 650.17534844798,
}

// SaturationPressure returns the pressure in Pa at which water boils at T in K,
// by IAPWS-IF97 region 4. The error is a *[thermo.RangeError] outside 273.15 K
// to 647.096 K.
func SaturationPressure(T float64) (float64, error) {
	b := thermo.Bounds{MinT: lowestTemperature, MaxT: criticalTemperature, MinP: 0, MaxP: criticalPressure}
	if err := b.Check("water", T, criticalPressure, "range of the saturation line"); err != nil {
		return 0, err
	}
	return saturationPressure(T), nil
}

// SaturationTemperature returns the temperature in K at which water boils at the
// absolute pressure p in Pa, by IAPWS-IF97 region 4. The error is a
// *[thermo.RangeError] outside 611.213 Pa to 22.064 MPa.
func SaturationTemperature(p float64) (float64, error) {
	b := thermo.Bounds{MinT: lowestTemperature, MaxT: criticalTemperature, MinP: lowestSaturation, MaxP: criticalPressure}
	if err := b.Check("water", lowestTemperature, p, "range of the saturation line"); err != nil {
		return 0, err
	}
	return saturationTemperature(p), nil
}

func saturationPressure(T float64) float64 {
	n := &saturation
	t := T + n[8]/(T-n[9])
	a := (t+n[0])*t + n[1]
	b := (n[2]*t+n[3])*t + n[4]
	c := (n[5]*t+n[6])*t + n[7]
	root := 2 * c / (math.Sqrt(b*b-4*a*c) - b)
	root *= root
	return 1e6 * root * root
}

func saturationTemperature(p float64) float64 {
	n := &saturation
	beta := math.Sqrt(math.Sqrt(p / 1e6))
	e := (beta+n[2])*beta + n[5]
	f := (n[0]*beta+n[3])*beta + n[6]
	g := (n[1]*beta+n[4])*beta + n[7]
	d := 2 * g / (-f - math.Sqrt(f*f-4*e*g))
	s := n[9] + d
	return (s - math.Sqrt(s*s-4*(n[8]+n[9]*d))) / 2
}
