package oil

import "fmt"

// waterAt60F is the density in kg/m³ of the water to which specific gravity at 60 °F
// refers.
const waterAt60F = 999.016

// API gravities that petroleum may have: beyond, D1250 has no group.
const minAPI, maxAPI = -10.0, 100.0

// DensityOfAPI returns the density in kg/m³ at 15 °C of a liquid of that API gravity, which
// is at 60 °F:
//
//	SG = 141.5/(API + 131.5),   ρ(60 °F) = 999.016 kg/m³ · SG
//
// and from 60 °F to 15 °C by the volume correction of the group, "" being chosen by density
// (see [Petroleum]).
func DensityOfAPI(api float64, groupName string) (float64, error) {
	if !(api >= minAPI && api <= maxAPI) {
		return 0, fmt.Errorf("API gravity of %g; it lies from %g to %g", api, minAPI, maxAPI)
	}
	rho60 := waterAt60F * 141.5 / (api + 131.5)
	g, err := choose(groupName, func(*group) float64 { return rho60 })
	if err != nil {
		return 0, err
	}
	rho15 := rho60
	for range 20 { // closer by some 1e-3 a step
		rho15 = rho60 / correction(g.alpha(rho15), sixtyF-fifteenC)
	}
	return rho15, nil
}

// APIOfDensity returns the API gravity of a liquid by its density in kg/m³ at 15 °C, the
// inverse of [DensityOfAPI].
func APIOfDensity(density15 float64, groupName string) (float64, error) {
	g, err := groupFor(density15, groupName)
	if err != nil {
		return 0, err
	}
	return 141.5/g.specificGravity(density15) - 131.5, nil
}
