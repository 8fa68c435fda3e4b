package air

import (
	"fmt"
	"math"

	"heatreeve/thermo"
)

// massRatio of the molar masses of water and dry air, as ASHRAE has it.
const massRatio = 0.621945

// noise is the relative humidity up to which a reading is taken for saturation: sensors
// in saturated air show a little more.
const noise = 1.02

// HumidityRatio returns the mass of vapour per mass of dry air for the humidity m of air at T in
// K and p in Pa:
//
//	W = 0.621945 pw/(p − pw)
//
// with the partial pressure pw from the saturation equations, or for the wet bulb W from the
// energy balance of the wick, over ice below 0 °C. A dew point below 0 °C is the frost point.
//
// A relative humidity below 0 °C is over ice too. Most sensors, and weather services by the
// convention of the WMO, mean over supercooled water: the same reading then is 1.10 times as much
// vapour at -10 °C, 1.22 times at -20 °C, and saturation over ice already shows as 91 % and 82 %.
// Give such a reading as a frost point or a humidity ratio.
//
// A humidity above saturation by up to 2 % in pw is taken for saturation, as sensors have
// such errors. Beyond, and for any other figure that cannot be, the error names the
// figure; it is a *[thermo.RangeError] where T or p is outside the range of the fluid.
func HumidityRatio(m thermo.Moisture, T, p float64) (float64, error) {
	if err := bounds.Check(liveName, T, p, validity); err != nil {
		return 0, err
	}
	pw, err := vapourPressure(m, T, p)
	if err != nil {
		return 0, err
	}
	if saturated := saturationPressure(T); pw > saturated {
		if pw > noise*saturated {
			return 0, aboveSaturation(m, T, pw/saturated)
		}
		pw = saturated
	}
	w := ratioOf(pw, p)
	if w > maxRatio {
		return 0, fmt.Errorf("%s at %s and %.6g kPa makes a humidity ratio of %.4g kg/kg; the relations are held to no more than %g", show(m), celsius(T), p/1e3, w, maxRatio)
	}
	return w, nil
}

// ratioOf is +Inf where the vapour alone would have all of the pressure.
func ratioOf(pw, p float64) float64 {
	if pw >= p {
		return math.Inf(1)
	}
	return massRatio * pw / (p - pw)
}

func pressureOf(w, p float64) float64 { return p * w / (massRatio + w) }

// vapourPressure is the partial pressure in Pa that m says.
func vapourPressure(m thermo.Moisture, T, p float64) (float64, error) {
	switch m.Kind {
	case thermo.HumidityRatio:
		if err := checkRatio(m.Value); err != nil {
			return 0, err
		}
		return pressureOf(m.Value, p), nil
	case thermo.RelativeHumidity:
		if !(m.Value >= 0 && m.Value <= noise) {
			return 0, fmt.Errorf("%s is outside of 0 to 100 %%; up to %g %% is taken for saturation", show(m), 100*noise)
		}
		return m.Value * saturationPressure(T), nil
	case thermo.DewPoint:
		if !(m.Value >= coldest && m.Value <= hottest) {
			return 0, fmt.Errorf("%s is outside of %s to %s", show(m), celsius(coldest), celsius(hottest))
		}
		return saturationPressure(m.Value), nil
	case thermo.WetBulb:
		return wetBulbPressure(m, T, p)
	}
	return 0, fmt.Errorf("humidity of the unknown kind %d", m.Kind)
}

func wetBulbPressure(m thermo.Moisture, T, p float64) (float64, error) {
	if !(m.Value >= coldest && m.Value <= hottest) || saturationPressure(m.Value) >= p {
		return 0, fmt.Errorf("%s: no wick has that at %.6g kPa", show(m), p/1e3)
	}
	w := wickRatio(m.Value, T, p)
	if w < 0 {
		least, err := WetBulb(0, T, p)
		if err != nil {
			return 0, err
		}
		return 0, fmt.Errorf("%s is below %s, which air without vapour has at %s and %.6g kPa", show(m), celsius(least), celsius(T), p/1e3)
	}
	return pressureOf(w, p), nil
}

// wickRatio is the humidity ratio of air at T that a wick at the thermodynamic wet-bulb
// temperature has: ASHRAE Handbook Fundamentals 2017, chapter 1, equations 33 (water) and 35 (ice).
func wickRatio(wick, T, p float64) float64 {
	t, w := T-zero, wick-zero
	saturated := ratioOf(saturationPressure(wick), p)
	if wick >= zero {
		return ((2501-2.326*w)*saturated - 1.006*(t-w)) / (2501 + 1.86*t - 4.186*w)
	}
	return ((2830-0.24*w)*saturated - 1.006*(t-w)) / (2830 + 1.86*t - 2.1*w)
}

func checkRatio(w float64) error {
	if w >= 0 && w <= maxRatio {
		return nil
	}
	return fmt.Errorf("humidity ratio %g kg/kg is outside of 0 to %g", w, maxRatio)
}

func aboveSaturation(m thermo.Moisture, T, relative float64) error {
	if (m.Kind == thermo.DewPoint || m.Kind == thermo.WetBulb) && m.Value > T {
		return fmt.Errorf("%s is above the temperature of the air, %s", show(m), celsius(T))
	}
	return fmt.Errorf("%s at %s is above saturation: relative humidity %.4g %%", show(m), celsius(T), 100*relative)
}

func show(m thermo.Moisture) string {
	switch m.Kind {
	case thermo.HumidityRatio:
		return fmt.Sprintf("humidity ratio %.6g g/kg", 1e3*m.Value)
	case thermo.RelativeHumidity:
		return fmt.Sprintf("relative humidity %.6g %%", 100*m.Value)
	case thermo.DewPoint:
		return "dew point " + celsius(m.Value)
	}
	return "wet bulb " + celsius(m.Value)
}

func celsius(T float64) string { return fmt.Sprintf("%.6g °C", T-zero) }
