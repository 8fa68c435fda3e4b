package gas_test

import (
	"fmt"

	"heatreeve/thermo"
	"heatreeve/thermo/gas"
)

func ExampleDryAir() {
	air, err := gas.DryAir(gas.Ideal)
	if err != nil {
		fmt.Println(err)
		return
	}
	cold, _ := air.At(298.15, 101325)
	hot, _ := air.At(873.15, 101325)
	fmt.Printf("cp %.0f and %.0f J/(kg K)\n", cold.Cp, hot.Cp)

	_, err = air.At(298.15, 5e6)
	fmt.Println(err)
	// Output:
	// cp 1005 and 1115 J/(kg K)
	// dry air: pressure 5000 kPa is above 944.482 kPa (range of the ideal gas)
}

func ExampleNew() {
	flue, err := gas.New(map[string]float64{"N2": 0.712, "CO2": 0.086, "H2O": 0.172, "O2": 0.030}, gas.Ideal)
	if err != nil {
		fmt.Println(err)
		return
	}
	dew, _ := flue.Span(101325)
	q, err := thermo.StreamHeat(flue, 3.4439026, 523.15, 101325, 393.15, 101325)
	fmt.Printf("%s\ndew point %.1f °C, heat %.1f kW, %v\n", flue.Name(), dew-273.15, q/1e3, err)

	_, err = gas.New(map[string]float64{"nitrogn": 1}, gas.Ideal)
	fmt.Println(err)
	// Output:
	// gas: {N2: 71.2 %, H2O: 17.2 %, CO2: 8.6 %, O2: 3 %}
	// dew point 57.1 °C, heat -508.9 kW, <nil>
	// unknown gas "nitrogn", did you mean "N2" (nitrogen); known gases: N2, O2, Ar, CO2, CO, H2O, H2, He, CH4, C2H6, C3H8, C4H10, C5H12, C2H4, NH3, SO2, H2S, NO, NO2, N2O, HCl, Cl2, dry air
}

func ExampleFlueGas() {
	oil := gas.Fuel{Mass: gas.Elements{C: 0.865, H: 0.133, S: 0.002}}
	f, err := gas.FlueGas(oil, gas.Combustion{DryO2: 0.04, HumidityRatio: 0.008})
	if err != nil {
		fmt.Println(err)
		return
	}
	dew, _ := f.Fluid.Span(101325)
	fmt.Printf("%s\n%.1f %% excess air, %.2f kg of flue gas per kg of oil, dry CO2 %.1f %%, water dew point %.0f °C\n",
		f.Fluid.Name(), 100*f.ExcessAir, f.PerFuel, 100*f.Dry()["CO2"], dew-273.15)
	// Output:
	// gas: {N2: 73.2 %, H2O: 11.31 %, CO2: 11.06 %, O2: 3.548 %, Ar: 0.8779 %, SO2: 0.009551 %}
	// 22.0 % excess air, 18.87 kg of flue gas per kg of oil, dry CO2 12.5 %, water dew point 48 °C
}
