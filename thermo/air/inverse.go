package air

import "heatreeve/thermo"

// RelativeHumidity returns pw/psat of air with the humidity ratio w at T in K and p in Pa: above 1
// where vapour would have to condense. The error says which figure is out of range.
func RelativeHumidity(w, T, p float64) (float64, error) {
	if err := bounds.Check(liveName, T, p, validity); err != nil {
		return 0, err
	}
	if err := checkRatio(w); err != nil {
		return 0, err
	}
	return pressureOf(w, p) / saturationPressure(T), nil
}

// DewPoint returns the temperature in K at which air with the humidity ratio w at p in Pa is
// saturated, below 0.01 °C over ice. It is 0 where that lies below -100 °C. The error
// says which figure is out of range.
func DewPoint(w, p float64) (float64, error) {
	if err := bounds.Check(liveName, zero, p, validity); err != nil {
		return 0, err
	}
	if err := checkRatio(w); err != nil {
		return 0, err
	}
	return saturationTemperature(pressureOf(w, p)), nil
}

// WetBulb returns the thermodynamic wet-bulb temperature in K of air with the humidity ratio w at T
// in K and p in Pa. Just about 0 °C a wick of water and one of ice may both be in
// balance; the one of water is returned. The error says which figure is out of
// range, or that the air is beyond saturation.
func WetBulb(w, T, p float64) (float64, error) {
	relative, err := RelativeHumidity(w, T, p)
	if err != nil {
		return 0, err
	}
	if relative > 1+rounding {
		return 0, aboveSaturation(thermo.Moisture{Kind: thermo.HumidityRatio, Value: w}, T, relative)
	}
	lo, hi := coldest, T
	if T >= zero && wickRatio(zero, T, p) <= w {
		lo = zero
	} else {
		hi = min(T, zero)
	}
	for range 60 { // to the last bit of what 300 K in halves can be
		mid := lo + (hi-lo)/2
		if wickRatio(mid, T, p) < w {
			lo = mid
		} else {
			hi = mid
		}
	}
	return hi, nil
}
