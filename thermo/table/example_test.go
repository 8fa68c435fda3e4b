package table_test

import (
	"fmt"

	"heatreeve/thermo"
	"heatreeve/thermo/table"
)

func ExampleNew() {
	oil, err := table.New("plant oil", "delivery sheet of an invented oil", []table.Point{
		{T: 300, Cp: 2000, Density: 900},
		{T: 350, Cp: 2200, Density: 860},
		{T: 450, Cp: 2500, Density: 780},
	}, table.Options{CpUncertainty: 0.02, Boiling: 440})
	if err != nil {
		fmt.Println(err)
		return
	}
	q, err := thermo.StreamHeat(oil, 2, 300, 3e5, 350, 3e5)
	fmt.Printf("2 kg/s from 300 to 350 K: %.0f kW, %v\n", q/1e3, err)

	_, err = oil.At(445, 3e5)
	fmt.Println(err)
	// Output:
	// 2 kg/s from 300 to 350 K: 210 kW, <nil>
	// plant oil: temperature 171.85 °C is above 166.85 °C (boiling point as stated)
}

// A constant cp is used only where its range is stated.
func ExampleNew_constant() {
	row := []table.Point{{T: 340, Cp: 2131, Density: 850}}
	_, err := table.New("engine oil", "handbook", row, table.Options{})
	fmt.Println(err)

	oil, err := table.New("engine oil", "handbook", row, table.Options{MinT: 300, MaxT: 380})
	if err != nil {
		fmt.Println(err)
		return
	}
	q, err := thermo.StreamHeat(oil, 0.1, 373.15, 101325, 333.15, 101325)
	fmt.Printf("%.0f W, %v\n", q, err)
	// Output:
	// table "engine oil": one row is a constant cp and density: state the range of temperature that it holds for
	// -8524 W, <nil>
}

// A data sheet that gives polynomials in °C.
func ExamplePolynomial() {
	oil, err := table.Polynomial("silicone oil", "delivery sheet of an invented oil",
		[]float64{1500, 1.7}, []float64{968, -0.9},
		table.Options{MinT: 253.15, MaxT: 473.15, CpUncertainty: 0.015})
	if err != nil {
		fmt.Println(err)
		return
	}
	s, err := oil.At(373.15, 3e5)
	fmt.Printf("100 °C: cp %.0f J/(kg K), %.0f kg/m³, %v\n", s.Cp, s.Density, err)

	_, err = table.Polynomial("silicone oil", "delivery sheet of an invented oil",
		[]float64{1500, 1.7}, []float64{968, -9},
		table.Options{MinT: 253.15, MaxT: 473.15})
	fmt.Println(err)
	// Output:
	// 100 °C: cp 1670 J/(kg K), 878 kg/m³, <nil>
	// polynomial "silicone oil": density is not above zero at 473.15 K, within the range 253.15 K to 473.15 K
}

// Rows with vapour pressures let the liquid boil later under pressure.
func ExamplePoint() {
	oil, err := table.New("plant oil", "delivery sheet of an invented oil", []table.Point{
		{T: 400, Cp: 2000, Density: 900},
		{T: 500, Cp: 2300, Density: 820, VapourPressure: 20e3},
		{T: 600, Cp: 2600, Density: 730, VapourPressure: 250e3},
	}, table.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, p := range []float64{50e3, 101325, 300e3} {
		_, boiling := oil.Span(p)
		fmt.Printf("%.0f kPa: boils at %.0f K\n", p/1e3, boiling)
	}
	// Output:
	// 50 kPa: boils at 532 K
	// 101 kPa: boils at 560 K
	// 300 kPa: boils at +Inf K
}
