package water

import "heatreeve/thermo"

const (
	whyBoils     = `saturation lies there: in between water boils and its heat is latent; beyond, the fluid to ask for is "steam"`
	whyCondenses = `saturation lies there: in between steam condenses and its heat is latent; beyond, the fluid to ask for is "water"`
	whyNotGas    = `critical temperature: down from there, at this pressure, the fluid to ask for is "water", which does not boil`
	whyCritical  = "critical point, where cp is infinite"
)

// liquidRefusal says why a state is not one of water, and nil where it is.
func liquidRefusal(T, p float64) error {
	if err := liquidBounds.Check("water", T, p, "range of IAPWS-IF97 for water"); err != nil {
		return err
	}
	switch {
	case p > criticalPressure:
		return nil
	case T > criticalTemperature:
		return &thermo.RangeError{Fluid: "water", Quantity: "temperature", Value: T, Bound: saturationTemperature(p), Why: whyBoils}
	}
	if s := saturationPressure(T); p < s {
		return &thermo.RangeError{Fluid: "water", Quantity: "pressure", Value: p, Bound: s, Below: true, Why: whyBoils}
	}
	return nil
}

// steamRefusal says why a state is not one of steam, and nil where it is.
func steamRefusal(T, p float64) error {
	if err := steamBounds.Check("steam", T, p, "range of IAPWS-IF97 for steam"); err != nil {
		return err
	}
	switch {
	case T > region2MaxT && p > region5MaxP:
		return &thermo.RangeError{Fluid: "steam", Quantity: "pressure", Value: p, Bound: region5MaxP, Why: "range of IAPWS-IF97 above 800 °C"}
	case T >= criticalTemperature:
		return nil
	case p > criticalPressure:
		return &thermo.RangeError{Fluid: "steam", Quantity: "temperature", Value: T, Bound: criticalTemperature, Below: true, Why: whyNotGas}
	}
	if s := saturationPressure(T); p > s {
		return &thermo.RangeError{Fluid: "steam", Quantity: "pressure", Value: p, Bound: s, Why: whyCondenses}
	}
	return nil
}

func atCriticalPoint(T float64, phase thermo.Phase) error {
	name := "steam"
	if phase == thermo.Liquid {
		name = "water"
	}
	return &thermo.RangeError{Fluid: name, Quantity: "temperature", Value: T, Bound: criticalTemperature, Below: T < criticalTemperature, Why: whyCritical}
}
