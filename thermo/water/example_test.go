package water_test

import (
	"fmt"
	"math"

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

// Above the critical pressure water does not boil: one stream from feed water to
// live steam.
func ExampleLiquid_supercritical() {
	w := water.Liquid()
	q, err := thermo.StreamHeat(w, 1, 573.15, 28e6, 873.15, 27e6)
	fmt.Printf("%.1f kW per kg/s, %v\n", q/1e3, err)

	_, err = w.At(873.15, 20e6)
	fmt.Println(err)
	// Output:
	// 2145.6 kW per kg/s, <nil>
	// water: temperature 600 °C is above 365.746 °C (saturation lies there: in between water boils and its heat is latent; beyond, the fluid to ask for is "steam")
}

func ExampleTabulate() {
	exact := water.Liquid()
	fast := thermo.BalanceOf(water.Tabulate(exact, 273.15, 423.15, 1e5, 16e5))
	b, err := fast(333.15, 6e5)
	s, _ := exact.At(333.15, 6e5)
	fmt.Printf("h off by less than 2e-7: %v, %v\n", math.Abs(b.Enthalpy/s.Enthalpy-1) < 2e-7, err)

	_, err = fast(433.15, 6e5)
	fmt.Println(err)
	// Output:
	// h off by less than 2e-7: true, <nil>
	// water: pressure 600 kPa is below 618.139 kPa (saturation lies there: in between water boils and its heat is latent; beyond, the fluid to ask for is "steam")
}
