package air_test

import (
	"fmt"

	"heatreeve/thermo"
	"heatreeve/thermo/air"
)

// A cooling coil: what the duty of the air leaves out, and how one sees it.
func ExampleLive() {
	const p = 101325
	supply, err := air.Live().Carrying(thermo.Moisture{Kind: thermo.RelativeHumidity, Value: 0.6}, 301.15, p)
	if err != nil {
		fmt.Println(err)
		return
	}
	dew, _ := supply.Span(p)
	fmt.Printf("%s, dew point %.1f °C\n", supply.Name(), dew-273.15)

	_, err = supply.At(287.15, p)
	fmt.Println(err)

	warm, _ := supply.At(301.15, p)
	cold, _ := supply.Sensible(287.15, p)
	fmt.Printf("28 to 14 °C, sensible part: %.2f kJ per kg of moist air\n", (cold.Enthalpy-warm.Enthalpy)/1e3)

	_, err = air.Live().Carrying(thermo.Moisture{Kind: thermo.DewPoint, Value: 303.15}, 301.15, p)
	fmt.Println(err)
	// Output:
	// moist air 14.25 g/kg, dew point 19.5 °C
	// moist air 14.25 g/kg: temperature 14 °C is below 19.5141 °C (dew or frost point)
	// 28 to 14 °C, sensible part: -14.25 kJ per kg of moist air
	// dew point 30 °C is above the temperature of the air, 28 °C
}
