package solid_test

import (
	"fmt"

	"heatreeve/thermo"
	"heatreeve/thermo/solid"
)

func ExampleNew() {
	steel, err := solid.New("carbon steel")
	if err != nil {
		fmt.Println(err)
		return
	}
	q, err := thermo.StreamHeat(steel, 0.5, 293.15, 101325, 773.15, 101325)
	fmt.Printf("0.5 kg/s of billets from 20 to 500 °C: %.0f kW, %v\n", q/1e3, err)

	_, err = steel.At(1010, 101325)
	fmt.Println(err)
	// Output:
	// 0.5 kg/s of billets from 20 to 500 °C: 132 kW, <nil>
	// carbon steel: temperature 736.85 °C is above 600 °C (stated range of the polynomials)
}
