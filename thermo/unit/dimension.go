package unit

import "fmt"

// Dimension is the kind of a quantity.
type Dimension uint8

// A temperature is a point on a scale and a temperature difference a distance
// along it: "20 °C" is 293.15 K as the first and 20 K as the second. A molar
// flow is what a gas meter means by normal or standard volume a time, and an amount
// what it has counted of it.
const (
	Temperature           Dimension = iota + 1 // K
	TemperatureDifference                      // K
	Pressure                                   // Pa
	MassFlow                                   // kg/s
	VolumeFlow                                 // m³/s
	MolarFlow                                  // mol/s
	Mass                                       // kg
	Volume                                     // m³
	Energy                                     // J
	Power                                      // W
	SpecificHeat                               // J/(kg K)
	SpecificEnthalpy                           // J/kg
	Density                                    // kg/m³
	Ratio                                      // a fraction: 8 % is 0.08
	Duration                                   // s
	Size                                       // bytes of storage
	MolarMass                                  // kg/mol
	HeatCapacity                               // J/K
	Amount                                     // mol
	Count                                      // a number of pulses
	Resistance                                 // ohm
	Current                                    // A
	Conductance                                // W/K, of heat
	HeatResistance                             // K/W
)

var dimensions = [...]struct{ name, si string }{
	Temperature:           {"temperature", "K"},
	TemperatureDifference: {"temperature difference", "K"},
	Pressure:              {"pressure", "Pa"},
	MassFlow:              {"mass flow", "kg/s"},
	VolumeFlow:            {"volume flow", "m3/s"},
	MolarFlow:             {"normal or standard volume flow", "mol/s"},
	Mass:                  {"mass", "kg"},
	Volume:                {"volume", "m3"},
	Energy:                {"energy", "J"},
	Power:                 {"power", "W"},
	SpecificHeat:          {"specific heat", "J/(kg K)"},
	SpecificEnthalpy:      {"specific enthalpy", "J/kg"},
	Density:               {"density", "kg/m3"},
	Ratio:                 {"ratio", "1"},
	Duration:              {"duration", "s"},
	Size:                  {"storage size", "B"},
	MolarMass:             {"molar mass", "kg/mol"},
	HeatCapacity:          {"heat capacity", "J/K"},
	Amount:                {"normal or standard volume", "mol"},
	Count:                 {"count", "1"},
	Resistance:            {"resistance", "ohm"},
	Current:               {"current", "A"},
	Conductance:           {"heat conductance", "W/K"},
	HeatResistance:        {"resistance to heat", "K/W"},
}

func (d Dimension) String() string {
	if !d.valid() {
		return fmt.Sprintf("Dimension(%d)", uint8(d))
	}
	return dimensions[d].name
}

// SI is the symbol of the dimension's SI unit, "1" for a ratio or a count and "B" for a size.
func (d Dimension) SI() string {
	if !d.valid() {
		return ""
	}
	return dimensions[d].si
}

func (d Dimension) valid() bool { return d >= Temperature && int(d) < len(dimensions) }
