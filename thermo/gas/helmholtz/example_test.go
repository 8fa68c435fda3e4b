package helmholtz_test

import (
	"fmt"

	"heatreeve/thermo/gas/helmholtz"
)

// Carbon dioxide at 40 °C: an ideal gas would have cp = 0.86 kJ/(kg K) at any pressure.
func ExampleNew() {
	f, _ := helmholtz.New("CO2")
	for _, p := range []float64{1e5, 5e6, 8e6, 20e6} {
		s, err := f.At(313.15, p)
		fmt.Printf("%5.1f MPa: %6.2f kg/m³, cp %6.3f kJ/(kg K) %v\n", p/1e6, s.Density, s.Cp/1e3, err)
	}
	dew, _ := f.Span(5e6)
	fmt.Printf("dew point at 5 MPa: %.2f °C\n", dew-273.15)
	// Output:
	//   0.1 MPa:   1.70 kg/m³, cp  0.865 kJ/(kg K) <nil>
	//   5.0 MPa: 113.05 kg/m³, cp  1.470 kJ/(kg K) <nil>
	//   8.0 MPa: 277.90 kg/m³, cp  4.950 kJ/(kg K) <nil>
	//  20.0 MPa: 839.81 kg/m³, cp  2.254 kJ/(kg K) <nil>
	// dew point at 5 MPa: 14.28 °C
}

// Heat that liquid ammonia takes up until it is vapour, both at 1 MPa.
func ExampleLiquid() {
	liquid, _ := helmholtz.Liquid("NH3")
	gas, _ := helmholtz.New("NH3")
	a, _ := liquid.At(293.15, 1e6)
	b, _ := gas.At(303.15, 1e6)
	fmt.Printf("%.0f kJ/kg\n", (b.Enthalpy-a.Enthalpy)/1e3)
	// Output: 1205 kJ/kg
}
