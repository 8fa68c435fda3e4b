package seawater_test

import (
	"fmt"

	"heatreeve/thermo"
	"heatreeve/thermo/seawater"
)

func ExampleNew() {
	ocean, err := seawater.New(0.035)
	if err != nil {
		fmt.Println(err)
		return
	}
	in, err := ocean.At(288.15, 3e5)
	if err != nil {
		fmt.Println(err)
		return
	}
	freezing, _ := ocean.Span(3e5)
	fmt.Printf("%s: %.1f kg/m³, %.0f J/(kg K), freezes at %.2f °C\n", ocean.Name(), in.Density, in.Cp, freezing-273.15)

	q, err := thermo.StreamHeat(ocean, 100, 288.15, 3e5, 295.15, 2.5e5)
	fmt.Printf("100 kg/s from 15 to 22 °C: %.1f kW, %v\n", q/1e3, err)
	// Output:
	// seawater 35 g/kg: 1026.1 kg/m³, 3996 J/(kg K), freezes at -1.91 °C
	// 100 kg/s from 15 to 22 °C: 2794.0 kW, <nil>
}
