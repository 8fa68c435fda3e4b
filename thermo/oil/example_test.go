package oil_test

import (
	"fmt"

	"heatreeve/thermo"
	"heatreeve/thermo/oil"
)

func ExamplePetroleum() {
	density, err := oil.DensityOfAPI(17.4, "fuel oil")
	if err != nil {
		fmt.Println(err)
		return
	}
	fuel, err := oil.Petroleum(density, 11.5, "fuel oil")
	if err != nil {
		fmt.Println(err)
		return
	}
	cp, rho := fuel.Uncertainty(383.15, 8e5)
	q, err := thermo.StreamHeat(fuel, 1.2, 333.15, 8e5, 383.15, 8e5)
	fmt.Printf("%s\n60 to 110 °C at 1.2 kg/s: %.0f kW, %v; cp ± %.1f %%, density ± %.2f %%\n", fuel.Name(), q/1e3, err, 100*cp, 100*rho)
	// Output:
	// fuel oil 949.747 kg/m³, Watson 11.5
	// 60 to 110 °C at 1.2 kg/s: 120 kW, <nil>; cp ± 2.9 %, density ± 0.16 %
}

func ExampleHeatTransfer() {
	liquid, err := oil.HeatTransfer("Diphenyl oxide/biphenyl eutectic")
	if err != nil {
		fmt.Println(err)
		return
	}
	q, err := thermo.StreamHeat(liquid, 10, 563.15, 1e6, 663.15, 1e6)
	fmt.Printf("290 to 390 °C at 10 kg/s: %.0f kW, %v\n", q/1e3, err)

	_, err = liquid.At(663.15, 5e5)
	fmt.Println(err)
	// Output:
	// 290 to 390 °C at 10 kg/s: 2429 kW, <nil>
	// diphenyl oxide/biphenyl eutectic: temperature 390 °C is above 343.948 °C (boiling point at this pressure)
}
