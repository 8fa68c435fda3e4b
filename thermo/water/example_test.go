package water_test

import (
	"fmt"

	"heatreeve/thermo"
	"heatreeve/thermo/water"
)

func ExampleLiquid() {
	w := water.Liquid()
	s, err := w.At(333.15, 3e5) // 60 °C, 3 bar
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("density %.2f kg/m³, cp %.1f J/(kg K)\n", s.Density, s.Cp)

	_, err = w.At(373.15+40, 3e5) // 140 °C: boils
	fmt.Println(err)
	// Output:
	// density 983.30 kg/m³, cp 4182.3 J/(kg K)
	// water: pressure 300 kPa is below 361.501 kPa (saturation lies there: in between water boils and its heat is latent; beyond, the fluid to ask for is "steam")
}

func ExampleSteam() {
	s := water.Steam()
	dew, _ := s.Span(1e6)
	fmt.Printf("dew point at 10 bar: %.2f °C\n", dew-273.15)

	q, err := thermo.StreamHeat(s, 1, 573.15, 1e6, 473.15, 1e6)
	fmt.Printf("cooled from 300 to 200 °C: %.1f kW per kg/s, %v\n", q/1e3, err)
	// Output:
	// dew point at 10 bar: 179.89 °C
	// cooled from 300 to 200 °C: -223.4 kW per kg/s, <nil>
}

func ExampleSaturationTemperature() {
	for _, p := range []float64{101325, 6e5, 30e6} {
		T, err := water.SaturationTemperature(p)
		fmt.Printf("%.2f °C, %v\n", T-273.15, err)
	}
	// Output:
	// 99.97 °C, <nil>
	// 158.83 °C, <nil>
	// -273.15 °C, water: pressure 30000 kPa is above 22064 kPa (range of the saturation line)
}
