package food_test

import (
	"fmt"

	"heatreeve/thermo"
	"heatreeve/thermo/food"
)

func ExampleNew() {
	milk, err := food.New(food.Composition{Water: 0.873, Fat: 0.039, Protein: 0.033, Carbohydrate: 0.048, Ash: 0.007})
	if err != nil {
		fmt.Println(err)
		return
	}
	cold, _ := milk.Uncertainty(277.15, 3e5) // its fat may be melting
	warm, _ := milk.Uncertainty(345.15, 3e5)
	q, err := thermo.StreamHeat(milk, 2.8, 277.15, 3e5, 345.15, 3e5)
	fmt.Printf("%s\n4 to 72 °C at 2.8 kg/s: %.0f kW, cp ± %.1f %% cold, ± %.1f %% warm, %v\n", milk.Name(), q/1e3, 100*cold, 100*warm, err)

	_, err = milk.At(410, 3e5)
	fmt.Println(err)
	// Output:
	// food: {water: 87.3 %, fat: 3.9 %, protein: 3.3 %, carbohydrate: 4.8 %, ash: 0.7 %}
	// 4 to 72 °C at 2.8 kg/s: 732 kW, cp ± 2.4 % cold, ± 0.7 % warm, <nil>
	// food: {water: 87.3 %, fat: 3.9 %, protein: 3.3 %, carbohydrate: 4.8 %, ash: 0.7 %}: temperature 136.85 °C is above 133.525 °C (boiling point of water at this pressure; the food boils a little later)
}
