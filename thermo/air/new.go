package air

import (
	"fmt"

	"heatreeve/thermo"
)

// Moist returns air with the humidity ratio w in kg of vapour per kg of dry air, from 0 to
// 0.25. Its properties are per kilogram of moist air.
func Moist(humidityRatio float64) (thermo.Wet, error) {
	if err := checkRatio(humidityRatio); err != nil {
		return nil, err
	}
	return makeMoist(fmt.Sprintf("moist air %.4g g/kg", 1e3*humidityRatio), humidityRatio), nil
}

// Live returns moist air whose humidity is measured beside the stream; by itself it is dry
// air, W = 0.
func Live() thermo.Humid { return live{makeMoist(liveName, 0)} }

type live struct{ *moist }

// Carrying returns the air with the moisture m at T in K and p in Pa, by [HumidityRatio].
func (live) Carrying(m thermo.Moisture, T, p float64) (thermo.Wet, error) {
	w, err := HumidityRatio(m, T, p)
	if err != nil {
		return nil, err
	}
	return Moist(w)
}
