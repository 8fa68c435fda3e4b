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
